using System.Reflection;
using Xunit;

namespace Gaugeyard.Architecture.Tests;

/// <summary>The public surface of Statistics speaks arrays and its own records only.</summary>
public class PublicSurfaceTests
{
    private const BindingFlags Surface = BindingFlags.Public | BindingFlags.NonPublic | BindingFlags.Static | BindingFlags.Instance | BindingFlags.DeclaredOnly;

    [Fact]
    public void No_MathNet_type_stands_in_a_public_signature()
    {
        var foreign = new List<string>();
        foreach (var type in Assembly.Load("Gaugeyard.Statistics").GetExportedTypes())
        {
            Look(type.FullName!, type.BaseType);
            foreach (var contract in type.GetInterfaces())
                Look(type.FullName!, contract);
            foreach (var method in type.GetMethods(Surface).Cast<MethodBase>().Concat(type.GetConstructors(Surface)).Where(Seen))
            {
                foreach (var parameter in method.GetParameters())
                    Look($"{type.FullName}.{method.Name}", parameter.ParameterType);
                if (method is MethodInfo { ReturnType: var returned })
                    Look($"{type.FullName}.{method.Name}", returned);
            }
            foreach (var field in type.GetFields(Surface).Where(f => f.IsPublic || f.IsFamily || f.IsFamilyOrAssembly))
                Look($"{type.FullName}.{field.Name}", field.FieldType);
        }
        Assert.Empty(foreign);

        static bool Seen(MethodBase m) => m.IsPublic || m.IsFamily || m.IsFamilyOrAssembly;
        void Look(string where, Type? type)
        {
            if (type is null)
                return;
            if (type.HasElementType)
                Look(where, type.GetElementType());
            else if (type.Namespace?.StartsWith("MathNet", StringComparison.Ordinal) == true)
                foreign.Add($"{where} shows {type.FullName}");
            foreach (var argument in type.GetGenericArguments())
                if (!argument.IsGenericParameter)
                    Look(where, argument);
        }
    }

    [Fact]
    public void Statistics_touches_no_files_no_network_and_no_console()
    {
        string[] outside = ["System.IO.FileSystem", "System.Net.Http", "System.Net.Sockets", "System.Console", "System.Data.Common"];
        Assert.Empty(Assembly.Load("Gaugeyard.Statistics").GetReferencedAssemblies().Select(a => a.Name!).Intersect(outside));
    }
}
