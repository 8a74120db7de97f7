package dif

import (
	"cmp"
	"math"
	"slices"
)

// benjaminiHochberg returns the adjusted values of the p-values, in their order: with
// p(1) <= ... <= p(n), q(i) is the smallest n·p(j)/j over j >= i, at most 1. NaN entries
// belong to no family and stay NaN. Source: Benjamini & Hochberg (1995), J. R. Stat.
// Soc. B 57:289-300.
func benjaminiHochberg(p []float64) []float64 {
	q := make([]float64, len(p))
	var order []int
	for i, v := range p {
		q[i] = math.NaN()
		if !math.IsNaN(v) {
			order = append(order, i)
		}
	}
	slices.SortStableFunc(order, func(a, b int) int { return cmp.Compare(p[a], p[b]) })
	n := float64(len(order))
	smallest := 1.0
	for rank := len(order); rank >= 1; rank-- {
		i := order[rank-1]
		smallest = math.Min(smallest, n*p[i]/float64(rank))
		q[i] = smallest
	}
	return q
}
