package reports

import (
	"math"
	"strconv"
	"strings"
)

// missing is printed where a value does not exist.
const missing = "–"

// Limits of the letters on the delta scale, between which display rounding must not move a value.
const (
	limitB = 1.0
	limitC = 1.5
)

// fixed prints a number with the given decimals, without a sign on zero.
func fixed(x *float64, decimals int) string {
	if x == nil || math.IsNaN(*x) || math.IsInf(*x, 0) {
		return missing
	}
	s := strconv.FormatFloat(*x, 'f', decimals, 64)
	if strings.HasPrefix(s, "-") && strings.Trim(s, "-0.") == "" {
		s = s[1:]
	}
	return s
}

// mostDecimals ends the search for a display that agrees with a class.
const mostDecimals = 6

// faithful prints a number with the given decimals, and more, up to six, while the
// printed value stands on another side of a limit than the number.
func faithful(x *float64, decimals int, limits ...float64) string {
	s := fixed(x, decimals)
	if s == missing {
		return s
	}
	for d := decimals; d < mostDecimals && crosses(*x, s, limits); d++ {
		s = fixed(x, d+1)
	}
	return s
}

func crosses(x float64, printed string, limits []float64) bool {
	shown, err := strconv.ParseFloat(printed, 64)
	if err != nil {
		return false
	}
	for _, l := range limits {
		if (x >= l) != (shown >= l) {
			return true
		}
	}
	return false
}

// dDIF prints a D-DIF value with two decimals, more where the rounded value would
// contradict the class.
func dDIF(x *float64) string {
	if x == nil {
		return missing
	}
	size := math.Abs(*x)
	s := faithful(&size, 2, limitB, limitC)
	if s != missing && *x < 0 && strings.Trim(s, "0.") != "" {
		s = "-" + s
	}
	return s
}

// probability prints a p- or q-value with three decimals, more where the rounded value
// would stand on another side of the level.
func probability(p *float64, level float64) string {
	switch s := faithful(p, 3, level); {
	case s == "0.000":
		return "<0.001"
	case s == "1.000" && *p < 1:
		return ">0.999"
	default:
		return s
	}
}

// expected prints an expected count for a table cell: one decimal below 10, whole above.
func expected(x float64) string {
	switch {
	case math.IsNaN(x) || math.IsInf(x, 0):
		return missing
	case x > 0 && x < 0.05:
		return "<0.1"
	case x == 0:
		return "0"
	case x < 9.95:
		return strconv.FormatFloat(x, 'f', 1, 64)
	}
	return whole(int(math.Round(x)))
}

// about words an expected count.
func about(x float64) string {
	switch s := expected(x); s {
	case "0":
		return "none"
	case "<0.1":
		return "less than 0.1"
	default:
		return "about " + s
	}
}

// whole prints a count with commas between thousands.
func whole(n int) string {
	s := strconv.Itoa(n)
	for i := len(s) - 3; i > 0 && s[i-1] != '-'; i -= 3 {
		s = s[:i] + "," + s[i:]
	}
	return s
}

// percent prints a share of a whole.
func percent(part, all int) string {
	if all == 0 {
		return missing
	}
	share := 100 * float64(part) / float64(all)
	switch {
	case part > 0 && share < 0.1:
		return "<0.1 %"
	case share < 9.95:
		return strconv.FormatFloat(share, 'f', 1, 64) + " %"
	}
	return strconv.FormatFloat(share, 'f', 0, 64) + " %"
}

// plural prints a count and its noun.
func plural(n int, one, many string) string {
	if n == 1 {
		return "1 " + one
	}
	return whole(n) + " " + many
}

// shortest prints a number so that reading it back gives the same number.
func shortest(x *float64) string {
	if x == nil || math.IsNaN(*x) || math.IsInf(*x, 0) {
		return ""
	}
	return strconv.FormatFloat(*x, 'g', -1, 64)
}
