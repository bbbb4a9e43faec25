using System.Reflection;
using Xunit;

namespace Gaugeyard.Architecture.Tests;

/// <summary>Projects know only what the table of arrows lets them know.</summary>
public class ReferenceTests
{
    public static TheoryData<string> SourceProjects => [.. Repository.Projects.Where(p => p.Replace('\\', '/').Contains("/src/Gaugeyard.")).Select(Repository.NameOf)];

    [Fact]
    public void The_table_names_every_project_under_src() =>
        Assert.Equal(Arrows.Allowed.Keys.Select(k => "Gaugeyard." + k).Order(), SourceProjects.Select(r => r.Data).Order());

    [Theory]
    [MemberData(nameof(SourceProjects))]
    public void Project_files_draw_no_other_arrow(string name)
    {
        var allowed = Arrows.Allowed[name["Gaugeyard.".Length..]];
        var project = Repository.Read(Repository.Projects.Single(p => Repository.NameOf(p) == name));
        var ours = Repository.Includes(project, "ProjectReference").Select(i => Path.GetFileNameWithoutExtension(i.Replace('\\', '/'))["Gaugeyard.".Length..]);
        Assert.Empty(ours.Except(allowed.Projects));
        Assert.Empty(Repository.Includes(project, "PackageReference").Except(allowed.Packages));
        Assert.Empty(Repository.Includes(project, "Reference"));
    }

    [Theory]
    [MemberData(nameof(SourceProjects))]
    public void Assemblies_draw_no_other_arrow(string name)
    {
        var allowed = Arrows.Allowed[name["Gaugeyard.".Length..]];
        var ours = Assembly.Load(name).GetReferencedAssemblies().Select(a => a.Name!).Where(a => a.StartsWith("Gaugeyard.", StringComparison.Ordinal)).Select(a => a["Gaugeyard.".Length..]);
        Assert.Empty(ours.Except(allowed.Projects));
    }

    // a package that arrives through another project shows only in the assembly
    [Theory]
    [InlineData("MathNet", "Gaugeyard.Statistics")]
    [InlineData("ClosedXML", "Gaugeyard.Exchange")]
    [InlineData("ExcelDataReader", "Gaugeyard.Exchange")]
    [InlineData("DocumentFormat.OpenXml", "Gaugeyard.Exchange")]
    [InlineData("Microsoft.EntityFrameworkCore", "Gaugeyard.Storage")]
    [InlineData("Microsoft.Data.Sqlite", "Gaugeyard.Storage")]
    [InlineData("MudBlazor", "Gaugeyard.Portal")]
    public void A_library_is_known_to_one_project_only(string library, string owner)
    {
        foreach (string name in Arrows.Allowed.Keys.Select(k => "Gaugeyard." + k).Where(n => n != owner))
            Assert.DoesNotContain(Assembly.Load(name).GetReferencedAssemblies(), a => a.Name!.StartsWith(library, StringComparison.Ordinal));
    }

    [Fact]
    public void No_test_project_is_referenced_from_src()
    {
        foreach (string project in Repository.Projects.Where(p => p.Replace('\\', '/').Contains("/src/")))
            Assert.DoesNotContain(Repository.Includes(Repository.Read(project), "ProjectReference"), i => i.Contains("tests", StringComparison.Ordinal));
    }
}
