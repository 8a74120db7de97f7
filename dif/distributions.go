package dif

import (
	"math"
	"slices"

	"gonum.org/v1/gonum/mathext"
)

// z95 is the .95 quantile of the standard normal distribution, the constant of the
// test that |D-DIF| exceeds 1.
const z95 = 1.6448536269514722

// chiSquareTail returns Pr(X > x) of a chi-square variable with df degrees of
// freedom, computed as an upper tail, so that it keeps its meaning down to 1e-300.
func chiSquareTail(x float64, df int) float64 {
	switch {
	case math.IsNaN(x) || df < 1:
		return math.NaN()
	case x <= 0:
		return 1
	case df == 1:
		return math.Erfc(math.Sqrt(x / 2))
	case df == 2:
		return math.Exp(-x / 2)
	}
	return mathext.GammaIncRegComp(float64(df)/2, x/2)
}

// normalTail returns Pr(Z > z) of a standard normal variable.
func normalTail(z float64) float64 { return 0.5 * math.Erfc(z/math.Sqrt2) }

// normalQuantile returns the z with Pr(Z <= z) = p, for 0 < p < 1.
func normalQuantile(p float64) float64 { return mathext.NormalQuantile(p) }

// median returns the median of the sizes, 0 for none. The slice is sorted in place.
func median(sizes []int) float64 {
	if len(sizes) == 0 {
		return 0
	}
	slices.Sort(sizes)
	m := len(sizes) / 2
	if len(sizes)%2 == 1 {
		return float64(sizes[m])
	}
	return float64(sizes[m-1]+sizes[m]) / 2
}
