package report

import (
	"math"
	"strconv"
	"strings"
	"time"
	"unicode/utf8"
)

// Decimals of the numbers in files, by what they count.
const (
	decMW      = 3 // MW, MWh, MW·s, t
	decHz      = 4 // Hz, Hz/s
	decS       = 3
	decMoney   = 2
	decPrice   = 4 // per MWh, per MW, per Hz
	decInertia = 6 // per MW·s: a thousandth of a currency unit is a lot
	decShare   = 6 // gaps
	decPercent = 3
)

// fixed prints v with dec decimals, without a negative zero; infinities print as inf
// and -inf, an undefined number as nan.
func fixed(v float64, dec int) string {
	switch {
	case math.IsNaN(v):
		return "nan"
	case math.IsInf(v, 1):
		return "inf"
	case math.IsInf(v, -1):
		return "-inf"
	}
	s := strconv.FormatFloat(v, 'f', dec, 64)
	if s[0] == '-' && strings.Trim(s, "-0.") == "" {
		return s[1:]
	}
	return s
}

// printsZero tells whether fixed would print v as zero.
func printsZero(v float64, dec int) bool {
	return strings.Trim(fixed(v, dec), "0.") == ""
}

// grouped is fixed with commas between thousands, for people.
func grouped(v float64, dec int) string {
	s := fixed(v, dec)
	sign := ""
	if s[0] == '-' {
		sign, s = "-", s[1:]
	}
	if s == "nan" || s == "inf" {
		return sign + s
	}
	whole, rest := s, ""
	if i := strings.IndexByte(s, '.'); i >= 0 {
		whole, rest = s[:i], s[i:]
	}
	for i := len(whole) - 3; i > 0; i -= 3 {
		whole = whole[:i] + "," + whole[i:]
	}
	return sign + whole + rest
}

// count prints a whole number for people.
func count(n int) string { return grouped(float64(n), 0) }

// plain prints v with as few digits as it needs (a limit, as the user wrote it).
func plain(v float64) string { return strconv.FormatFloat(v, 'g', -1, 64) }

// stamp is the time format of the files.
func stamp(t time.Time) string { return t.UTC().Format(time.RFC3339) }

// minute is the time format for people.
func minute(t time.Time) string { return t.UTC().Format("2006-01-02 15:04") }

// clip shortens s to at most n characters.
func clip(s string, n int) string {
	if utf8.RuneCountInString(s) <= n {
		return s
	}
	return string([]rune(s)[:n-1]) + "…"
}

// wrap breaks text at spaces into lines of at most width characters.
func wrap(text string, width int) []string {
	var lines []string
	line := ""
	for _, word := range strings.Fields(text) {
		word = clip(word, width)
		switch {
		case line == "":
			line = word
		case utf8.RuneCountInString(line)+1+utf8.RuneCountInString(word) <= width:
			line += " " + word
		default:
			lines = append(lines, line)
			line = word
		}
	}
	if line != "" {
		lines = append(lines, line)
	}
	return lines
}

// padRight and padLeft fill s with spaces to n characters, clipping it if it is longer.
func padRight(s string, n int) string {
	s = clip(s, n)
	return s + strings.Repeat(" ", n-utf8.RuneCountInString(s))
}

func padLeft(s string, n int) string {
	s = clip(s, n)
	return strings.Repeat(" ", n-utf8.RuneCountInString(s)) + s
}

// finite is v, or 0 where a plot could not show it.
func finite(v float64) float64 {
	if math.IsNaN(v) || math.IsInf(v, 0) {
		return 0
	}
	return v
}
