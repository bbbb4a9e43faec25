using Gaugeyard.Records.Ledger;

namespace Gaugeyard.Portal.Access;

/// <summary>
/// Who is writing. Without accounts everybody on this computer is the same person; this class is the one place to change
/// when accounts come.
/// </summary>
internal sealed class LocalUser : ICurrentUser
{
    public string Name { get; } = string.IsNullOrWhiteSpace(Environment.UserName) ? "local" : Environment.UserName;
}
