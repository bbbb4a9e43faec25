using System.Globalization;

namespace Gaugeyard.Exchange.Detection;

/// <summary>What a written date says about the order of its parts.</summary>
internal enum DateShape
{
    /// <summary>No date.</summary>
    None,

    /// <summary>Year first, or the month as a word: no doubt.</summary>
    Clear,

    /// <summary>Only day first makes a date.</summary>
    DayFirst,

    /// <summary>Only month first makes a date.</summary>
    MonthFirst,

    /// <summary>Either order makes a date.</summary>
    Either,
}

/// <summary>Reads written dates and times: 2031-04-07, 2031/4/7 08:10, 07.04.2031, 4/7/31 8:10 PM, 7 Apr 2031, 20310407T081000.</summary>
internal static class DateText
{
    private static readonly string[] Months = ["jan", "feb", "mar", "apr", "may", "jun", "jul", "aug", "sep", "oct", "nov", "dec"];
    private static readonly string[] OtherMonths = ["januar", "februar", "märz", "april", "mai", "juni", "juli", "august", "september", "oktober", "november", "dezember"];

    /// <summary>Classifies a text and reads it with day first where either order makes a date.</summary>
    public static DateShape Read(string raw, DateOrder order, out long ticks)
    {
        ticks = 0;
        string text = Blanks.Trim(raw);
        if (text.Length is < 6 or > 40 || !char.IsAsciiDigit(text[0]) && !char.IsLetter(text[0]))
            return DateShape.None;
        string date = text, time = "";
        int cut = CutAt(text);
        if (cut > 0)
        {
            date = text[..cut].TrimEnd(',', ' ');
            time = text[(cut + 1)..].Trim();
        }
        if (time.Length > 0 && !TryTime(time, out ticks))
            return DateShape.None;
        return ReadDate(date, order, ref ticks);
    }

    // the time begins after a T between digits or after the last blank that a colon follows
    private static int CutAt(string text)
    {
        int colon = text.IndexOf(':', StringComparison.Ordinal);
        int t = text.IndexOf('T', StringComparison.Ordinal);
        if (t > 5 && char.IsAsciiDigit(text[t - 1]) && t + 1 < text.Length && char.IsAsciiDigit(text[t + 1]))
            return t;
        if (colon < 0)
            return -1;
        return text.LastIndexOf(' ', colon);
    }

    /// <summary>Whether the text carries a time zone, which a record does not keep.</summary>
    public static bool HasZone(string trimmed)
    {
        int cut = CutAt(trimmed);
        if (cut <= 0)
            return false;
        string time = trimmed[(cut + 1)..];
        return time.EndsWith('Z') || time.LastIndexOfAny(['+', '-']) > 3;
    }

    private static bool TryTime(string time, out long ticks)
    {
        ticks = 0;
        string text = time;
        bool afternoon = false, half = false;
        if (text.EndsWith("am", StringComparison.OrdinalIgnoreCase) || text.EndsWith("pm", StringComparison.OrdinalIgnoreCase))
        {
            half = true;
            afternoon = char.ToLowerInvariant(text[^2]) == 'p';
            text = text[..^2].TrimEnd();
        }
        if (text.EndsWith('Z'))
            text = text[..^1];
        else if (text.Length > 6 && text.LastIndexOfAny(['+', '-']) is > 3 and var zone)
        {
            // the zone is dropped: the record keeps the clock time that the file shows
            if (text.AsSpan(zone + 1).ContainsAnyExceptInRange('0', ':'))
                return false;
            text = text[..zone];
        }
        string[] parts = text.Contains(':', StringComparison.Ordinal) ? text.Split(':') : text.Length is 4 or 6 ? [text[..2], text[2..4], .. text.Length == 6 ? new[] { text[4..] } : []] : [];
        if (parts.Length is < 2 or > 3 || !TryInt(parts[0], 2, out int hour) || !TryInt(parts[1], 2, out int minute))
            return false;
        long fraction = 0;
        int second = 0;
        if (parts.Length == 3)
        {
            string[] split = parts[2].Split('.', ',');
            if (!TryInt(split[0], 2, out second) || split.Length > 2)
                return false;
            if (split.Length == 2)
            {
                if (split[1].Length is 0 or > 9 || split[1].AsSpan().ContainsAnyExceptInRange('0', '9'))
                    return false;
                fraction = long.Parse(split[1].PadRight(9, '0'), CultureInfo.InvariantCulture) / 100;
            }
        }
        if (half)
        {
            if (hour is < 1 or > 12)
                return false;
            hour = hour % 12 + (afternoon ? 12 : 0);
        }
        if (hour > 23 && !(hour == 24 && minute == 0 && second == 0) || minute > 59 || second > 59)
            return false;
        ticks = ((hour * 60L + minute) * 60 + second) * TimeSpan.TicksPerSecond + fraction;
        return true;
    }

    private static DateShape ReadDate(string date, DateOrder order, ref long ticks)
    {
        if (date.Length == 8 && !date.AsSpan().ContainsAnyExceptInRange('0', '9'))
            return Make(int.Parse(date[..4]), int.Parse(date[4..6]), int.Parse(date[6..]), ref ticks) && date[0] is '1' or '2' ? DateShape.Clear : DateShape.None;
        string[] parts = date.Split(['-', '/', '.', ' '], StringSplitOptions.RemoveEmptyEntries);
        if (parts.Length == 4 && parts[0].Length >= 2 && char.IsLetter(parts[0][0]) && IsWeekday(parts[0]))
            parts = parts[1..];
        if (parts.Length != 3)
            return DateShape.None;
        for (int i = 0; i < 3; i++)
            parts[i] = parts[i].TrimEnd(',');
        int word = Array.FindIndex(parts, p => p.Length > 0 && char.IsLetter(p[0]));
        if (word >= 0)
        {
            int month = MonthOf(parts[word]);
            if (month == 0 || word == 2)
                return DateShape.None;
            string dayText = word == 0 ? parts[1] : parts[0], yearText = parts[2];
            if (word == 1 && parts[0].Length == 4)
                (dayText, yearText) = (parts[2], parts[0]);
            return TryInt(dayText, 2, out int day) && TryYear(yearText, out int year) && Make(year, month, day, ref ticks) ? DateShape.Clear : DateShape.None;
        }
        if (parts[0].Length == 4)
            return TryInt(parts[0], 4, out int y) && TryInt(parts[1], 2, out int m) && TryInt(parts[2], 2, out int d) && Make(y, m, d, ref ticks) ? DateShape.Clear : DateShape.None;
        if (!TryInt(parts[0], 2, out int a) || !TryInt(parts[1], 2, out int b))
            return DateShape.None;
        if (order == DateOrder.YearFirst && parts[2].Length <= 2 && parts[0].Length == 2)
            return TryYear(parts[0], out int y2) && TryInt(parts[2], 2, out int d2) && Make(y2, b, d2, ref ticks) ? DateShape.Clear : DateShape.None;
        if (!TryYear(parts[2], out int third))
            return DateShape.None;
        long time = ticks, dayTicks = time, monthTicks = time;
        bool dayFirst = Make(third, b, a, ref dayTicks), monthFirst = Make(third, a, b, ref monthTicks);
        ticks = dayFirst && (!monthFirst || order != DateOrder.MonthFirst) ? dayTicks : monthTicks;
        return dayFirst ? monthFirst ? a == b ? DateShape.Clear : DateShape.Either : DateShape.DayFirst : monthFirst ? DateShape.MonthFirst : DateShape.None;
    }

    private static bool IsWeekday(string word) => word.Length >= 2 && "mo tu we th fr sa su di mi do so".Contains(word[..2].ToLowerInvariant(), StringComparison.Ordinal);

    private static int MonthOf(string word)
    {
        string lower = word.TrimEnd('.').ToLowerInvariant();
        if (lower.Length < 3)
            return 0;
        for (int i = 0; i < 12; i++)
            if (lower == OtherMonths[i] || lower == Months[i] || lower.Length > 3 && CultureInfo.InvariantCulture.DateTimeFormat.MonthNames[i].StartsWith(lower, StringComparison.OrdinalIgnoreCase) || OtherMonths[i].StartsWith(lower, StringComparison.Ordinal))
                return i + 1;
        return 0;
    }

    private static bool TryYear(string text, out int year)
    {
        if (!TryInt(text, 4, out year) || text.Length is not (2 or 4))
            return false;
        if (text.Length == 2)
            year += year < 70 ? 2000 : 1900;
        return true;
    }

    private static bool TryInt(string text, int most, out int value)
    {
        value = 0;
        if (text.Length == 0 || text.Length > most)
            return false;
        foreach (char c in text)
        {
            if (!char.IsAsciiDigit(c))
                return false;
            value = value * 10 + (c - '0');
        }
        return true;
    }

    private static bool Make(int year, int month, int day, ref long ticks)
    {
        if (year is < 1 or > 9998 || month is < 1 or > 12 || day < 1 || day > DateTime.DaysInMonth(year, month))
            return false;
        ticks += new DateTime(year, month, day).Ticks;
        return true;
    }
}
