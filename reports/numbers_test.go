package reports

import (
	"math"
	"testing"
)

// The rule of methods.md 4.1: a printed value must not contradict the letter, which
// turns at 1.0 and 1.5 in size. The values are chosen by hand.
func TestDDIFAgreesWithTheLetter(t *testing.T) {
	t.Parallel()
	for _, c := range []struct {
		x    float64
		want string
	}{
		{1.4996, "1.4996"}, // CV-17 has 1.49, 1.5 and .999999 as cases of the rule
		{1.496, "1.496"}, {1.49, "1.49"}, {1.5, "1.50"}, {1.504, "1.50"}, {-1.4996, "-1.4996"}, {-1.495, "-1.495"},
		{0.999999, "0.999999"}, {0.9999999, "1.000000"}, {1, "1.00"}, {0.994, "0.99"}, {-1.004, "-1.00"},
		{0, "0.00"}, {-0.001, "0.00"}, {2.675, "2.67"}, {-2.26327, "-2.26"},
	} {
		if got := dDIF(&c.x); got != c.want {
			t.Errorf("dDIF(%v) = %q, want %q", c.x, got, c.want)
		}
	}
}

func TestNumbersThatDoNotExist(t *testing.T) {
	t.Parallel()
	for _, x := range []*float64{nil, ptr(math.NaN()), ptr(math.Inf(1)), ptr(math.Inf(-1))} {
		for name, got := range map[string]string{"dDIF": dDIF(x), "fixed": fixed(x, 2), "probability": probability(x, 0.05)} {
			if got != missing {
				t.Errorf("%s of no value = %q", name, got)
			}
		}
		if got := shortest(x); got != "" {
			t.Errorf("shortest of no value = %q", got)
		}
	}
}

func TestProbabilityStaysOnItsSideOfTheLevel(t *testing.T) {
	t.Parallel()
	for _, c := range []struct {
		p, level float64
		want     string
	}{
		{0.0498, 0.05, "0.0498"}, {0.0504, 0.05, "0.050"}, {0.05, 0.05, "0.050"}, {0.0104, 0.05, "0.010"},
		{0.0004, 0.05, "<0.001"}, {0, 0.05, "<0.001"}, {0.9998, 0.05, ">0.999"}, {1, 0.05, "1.000"}, {0.00096, 0.05, "0.001"},
	} {
		if got := probability(&c.p, c.level); got != c.want {
			t.Errorf("probability(%v, %v) = %q, want %q", c.p, c.level, got, c.want)
		}
	}
}

func TestCountsInWords(t *testing.T) {
	t.Parallel()
	for n, want := range map[int]string{0: "0", 999: "999", 1000: "1,000", 4325960: "4,325,960", -1234: "-1,234"} {
		if got := whole(n); got != want {
			t.Errorf("whole(%d) = %q, want %q", n, got, want)
		}
	}
	for x, want := range map[float64]string{0: "none", 0.01: "less than 0.1", 0.06: "about 0.1", 1.24: "about 1.2", 12.4: "about 12"} {
		if got := about(x); got != want {
			t.Errorf("about(%v) = %q, want %q", x, got, want)
		}
	}
}
