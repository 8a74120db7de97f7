package dif

import "math"

// exactTest returns the two-sided conditional p-value of no association: given all
// margins, ΣA is a sum of independent hypergeometric variables, and p is the total
// probability of outcomes no more probable than the one observed, with a relative
// tolerance of 1e-7 (as base R's mantelhaen.test does). It is meant for sparse tables:
// cost grows with the square of the number of possible outcomes.
func exactTest(t *ItemTable) float64 {
	dist := []float64{1}
	observed := 0 // index of the observed sum in dist
	for k := range t.Strata {
		x := t.table2x2(k)
		if !x.informative() {
			continue
		}
		lo, p := hypergeometric(x, 1)
		observed += int(x.a) - lo
		next := make([]float64, len(dist)+len(p)-1)
		for i, u := range dist {
			for j, v := range p {
				next[i+j] += u * v
			}
		}
		dist = next
	}
	limit := dist[observed] * (1 + 1e-7)
	var p float64
	for _, v := range dist {
		if v <= limit {
			p += v
		}
	}
	return math.Min(1, p)
}

// hypergeometric returns the distribution of the cell a given the margins when the
// odds ratio is psi: the smallest possible value and the probabilities from there up.
// At psi = 1 it is the ordinary hypergeometric distribution, else Fisher's noncentral one.
func hypergeometric(x cells, psi float64) (lo int, p []float64) {
	nR, nF, m := x.reference(), x.focal(), x.right()
	low, high := math.Max(0, m-nF), math.Min(nR, m)
	logs := make([]float64, int(high-low)+1)
	largest := 0.0
	for i := 1; i < len(logs); i++ {
		a := low + float64(i) - 1
		logs[i] = logs[i-1] + math.Log(psi*(nR-a)*(m-a)/((a+1)*(nF-m+a+1)))
		largest = math.Max(largest, logs[i])
	}
	var sum float64
	p = make([]float64, len(logs))
	for i, l := range logs {
		p[i] = math.Exp(l - largest)
		sum += p[i]
	}
	for i := range p {
		p[i] /= sum
	}
	return int(low), p
}

// extremeProbability returns the probability that ΣA takes the extreme value it has in
// a table whose odds ratio is infinite (direction -1: its maximum) or zero (direction
// 1: its minimum), if the true odds ratio were e^(1/2.35) or e^(-1/2.35), that is a D-DIF of
// -1 or 1. Below .05 the exact conditional one-sided test rejects |D-DIF| <= 1.
func extremeProbability(t *ItemTable, direction int) float64 {
	psi := math.Exp(-float64(direction) / deltaScale)
	p := 1.0
	for k := range t.Strata {
		x := t.table2x2(k)
		if !x.informative() {
			continue
		}
		_, q := hypergeometric(x, psi)
		if direction < 0 {
			p *= q[len(q)-1]
		} else {
			p *= q[0]
		}
	}
	return p
}
