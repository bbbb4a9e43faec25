using System.Text.RegularExpressions;
using Xunit;

namespace Gaugeyard.Architecture.Tests;

/// <summary>Layout and central settings of the repository.</summary>
public class HouseTests
{
    // names that gather whatever fits nowhere else
    private static readonly string[] Forbidden = ["Common", "Core", "Shared", "Helpers", "Utils", "Models", "Services"];

    [Fact]
    public void No_folder_or_project_has_a_name_that_says_nothing()
    {
        var folders = new[] { "src", "tests" }.SelectMany(f => Directory.EnumerateDirectories(Path.Combine(Repository.Root, f), "*", SearchOption.AllDirectories)).Where(d => !Repository.IsBuilt(Path.GetRelativePath(Repository.Root, d)));
        Assert.DoesNotContain(folders, d => Path.GetFileName(d).Split('.').Any(part => Forbidden.Contains(part, StringComparer.OrdinalIgnoreCase)));
    }

    [Fact]
    public void Every_package_has_its_version_in_one_place()
    {
        var central = Repository.Includes(Repository.Read(Path.Combine(Repository.Root, "Directory.Packages.props")), "PackageVersion").ToHashSet();
        foreach (string path in Repository.Projects)
        {
            var project = Repository.Read(path);
            Assert.Empty(Repository.Includes(project, "PackageReference").Except(central));
            Assert.DoesNotContain(project.Descendants("PackageReference"), e => e.Attribute("Version") is not null || e.Attribute("VersionOverride") is not null);
        }
    }

    [Fact]
    public void No_central_version_is_left_without_a_user()
    {
        var used = Repository.Projects.SelectMany(p => Repository.Includes(Repository.Read(p), "PackageReference")).ToHashSet();
        Assert.Empty(Repository.Includes(Repository.Read(Path.Combine(Repository.Root, "Directory.Packages.props")), "PackageVersion").Except(used));
    }

    [Fact]
    public void Nothing_switches_the_house_rules_off()
    {
        string[] rules = ["Nullable", "TreatWarningsAsErrors", "NoWarn", "TargetFramework", "DisableTransitiveProjectReferences"];
        foreach (string project in Repository.Projects)
            Assert.DoesNotContain(Repository.Read(project).Descendants(), e => rules.Contains(e.Name.LocalName));
        var house = Repository.Read(Path.Combine(Repository.Root, "Directory.Build.props"));
        foreach (string rule in new[] { "TreatWarningsAsErrors", "DisableTransitiveProjectReferences" })
            Assert.Equal("true", house.Descendants(rule).Single().Value);
        Assert.Equal("enable", house.Descendants("Nullable").Single().Value);
    }

    [Fact]
    public void The_solution_names_every_project()
    {
        var named = Repository.Read(Path.Combine(Repository.Root, "Gaugeyard.slnx")).Descendants("Project").Select(e => (string)e.Attribute("Path")!).Order(StringComparer.Ordinal);
        Assert.Equal(Repository.Projects.Select(p => Path.GetRelativePath(Repository.Root, p).Replace('\\', '/')).Order(StringComparer.Ordinal), named);
    }

    [Fact]
    public void Every_source_project_has_its_tests()
    {
        foreach (string name in Arrows.Allowed.Keys)
            Assert.Contains(Repository.Projects, p => Repository.NameOf(p) == $"Gaugeyard.{name}.Tests");
    }

    [Fact]
    public void Namespaces_are_file_scoped_and_follow_the_folders()
    {
        var wrong = new List<string>();
        foreach (string project in Repository.Projects)
        {
            string folder = Path.GetDirectoryName(project)!;
            foreach (string file in Directory.EnumerateFiles(folder, "*.cs", SearchOption.AllDirectories).Where(f => !Repository.IsBuilt(Path.GetRelativePath(folder, f)) && !f.Contains("Migrations", StringComparison.Ordinal)))
            {
                var match = Regex.Match(File.ReadAllText(file), @"^namespace ([\w.]+)(;?)", RegexOptions.Multiline);
                if (!match.Success)
                    continue; // a start file has none
                string expected = string.Join('.', new[] { Repository.NameOf(project) }.Concat(Path.GetRelativePath(folder, Path.GetDirectoryName(file)!).Split('/', '\\').Where(p => p != ".")));
                if (match.Groups[1].Value != expected || match.Groups[2].Length == 0)
                    wrong.Add($"{Path.GetRelativePath(Repository.Root, file)}: namespace {match.Groups[1].Value}, expected {expected};");
            }
        }
        Assert.Empty(wrong);
    }

    [Fact]
    public void Pages_and_components_know_neither_database_nor_workbook_library()
    {
        string portal = Path.Combine(Repository.Root, "src", "Gaugeyard.Portal");
        var wrong = new[] { "Pages", "Components", "Plots" }.Select(f => Path.Combine(portal, f)).Where(Directory.Exists)
            .SelectMany(f => Directory.EnumerateFiles(f, "*", SearchOption.AllDirectories)).Where(f => f.EndsWith(".razor", StringComparison.Ordinal) || f.EndsWith(".cs", StringComparison.Ordinal))
            .Where(f => Regex.IsMatch(File.ReadAllText(f), @"EntityFrameworkCore|ClosedXML|DbContext|Microsoft\.Data\.Sqlite|ExcelDataReader|MathNet"));
        Assert.Empty(wrong.Select(f => Path.GetRelativePath(Repository.Root, f)));
    }

    [Fact]
    public void The_root_holds_only_what_belongs_there()
    {
        string[] folders = ["src", "tests", "demo-data", "wwwroot"];
        string[] files = ["README.md", "DEVELOPERS.md", "CHANGELOG.md", "LICENSE", "appsettings.json", "Gaugeyard.slnx", "Directory.Build.props", "Directory.Packages.props", "global.json"];
        // data and artifacts are made by running and are ignored by git; names with a dot are tooling
        Assert.Empty(Directory.EnumerateDirectories(Repository.Root).Select(d => Path.GetFileName(d)!).Where(n => n[0] != '.' && n is not ("data" or "artifacts" or "TestResults")).Except(folders));
        Assert.Empty(Directory.EnumerateFiles(Repository.Root).Select(d => Path.GetFileName(d)!).Where(n => n[0] != '.').Except(files));
    }
}
