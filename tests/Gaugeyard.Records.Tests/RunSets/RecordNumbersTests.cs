using CsCheck;
using Gaugeyard.Records.RunSets;
using Xunit;

namespace Gaugeyard.Records.Tests.RunSets;

public sealed class RecordNumbersTests
{
    [Fact]
    public void Row_and_number_are_inverse_of_each_other() =>
        Gen.Select(Gen.Int[1, 5], Gen.Int[1, 50]).Array[1, 8].Sample(gaps =>
        {
            var runs = new List<(int, int)>();
            int next = 1;
            foreach (var (gap, count) in gaps)
            {
                runs.Add((next + gap, count));
                next += gap + count;
            }
            var numbers = new RecordNumbers(runs);
            int row = 0;
            foreach (var (first, count) in runs)
                for (int k = 0; k < count; k++, row++)
                {
                    Assert.Equal(first + k, numbers[row]);
                    Assert.Equal(row, numbers.RowOf(first + k));
                }
            Assert.Equal(row, numbers.Count);
            Assert.Equal(-1, numbers.RowOf(numbers.Highest + 1));
            Assert.Equal(-1, numbers.RowOf(0));
        });

    [Fact]
    public void Numbers_that_do_not_rise_are_refused() =>
        Assert.Throws<ArgumentException>(() => new RecordNumbers([(1, 5), (5, 2)]));
}
