using Gaugeyard.Statistics.Numerics;
using Xunit;

namespace Gaugeyard.Statistics.Tests.Numerics;

public sealed class RandomStreamTests
{
    // Known answers of Philox 4x32-10, published with Salmon et al. (2011) in the authors' known-answer file (from memory).
    [Fact]
    public void Block_matches_published_known_answers()
    {
        Assert.Equal((0x6627e8d5u, 0xe169c58du, 0xbc57ac4cu, 0x9b00dbd8u), RandomStream.Block(0, 0, 0, 0, 0, 0));
        Assert.Equal((0x408f276du, 0x41c83b0eu, 0xa20bc7c6u, 0x6d5451fdu),
            RandomStream.Block(uint.MaxValue, uint.MaxValue, uint.MaxValue, uint.MaxValue, uint.MaxValue, uint.MaxValue));
    }

    [Fact]
    public void Streams_of_different_tasks_and_indices_differ_and_repeat()
    {
        static double[] Draw(ulong seed, uint task, ulong index)
        {
            var stream = new RandomStream(seed, task, index);
            return [stream.NextDouble(), stream.NextDouble(), stream.NextNormal()];
        }

        Assert.Equal(Draw(7, 1, 2), Draw(7, 1, 2));
        Assert.NotEqual(Draw(7, 1, 2), Draw(7, 1, 3));
        Assert.NotEqual(Draw(7, 1, 2), Draw(7, 2, 2));
        Assert.NotEqual(Draw(7, 1, 2), Draw(8, 1, 2));
    }
}
