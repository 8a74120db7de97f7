package dif

import "math"

// moments are exact sums over candidates of one group: the item score x and the rest
// score r.
type moments struct{ n, x, xx, r, rr, xr float64 }

func (m *moments) add(n, x, r float64) {
	m.n += n
	m.x += n * x
	m.xx += n * x * x
	m.r += n * r
	m.rr += n * r * r
	m.xr += n * x * r
}

// correlation returns Pearson's r of item and rest score; NaN where either has no variance.
func (m *moments) correlation() float64 {
	vx, vr := m.n*m.xx-m.x*m.x, m.n*m.rr-m.r*m.r
	if !(vx > 0 && vr > 0) {
		return math.NaN()
	}
	return math.Max(-1, math.Min(1, (m.n*m.xr-m.x*m.r)/math.Sqrt(vx)/math.Sqrt(vr)))
}

// itemRest returns the correlation of the item with the matching score less the item,
// per group, from a table whose score contains the item. Sums of whole numbers are
// exact in any order.
func (t *ItemTable) itemRest() ItemRest {
	var m [2]moments
	for k, s := range t.Strata {
		for g := range m {
			for x, n := range t.group(k, g) {
				if n > 0 {
					m[g].add(float64(n), float64(x), s.Score-float64(x))
				}
			}
		}
	}
	return ItemRest{number(m[0].correlation()), number(m[1].correlation())}
}

// scoreMoments are the sums of the matching score of one group.
type scoreMoments struct {
	n    int
	mean float64
	ss   float64 // sum of squared deviations from the mean
}

// sd returns the standard deviation with divisor n-1; NaN below two candidates.
func (s scoreMoments) sd() float64 {
	if s.n < 2 {
		return math.NaN()
	}
	return math.Sqrt(s.ss / float64(s.n-1))
}

// weightedMoments returns the moments of scores that occur counts times each.
func weightedMoments(scores []float64, counts []uint32) scoreMoments {
	var m scoreMoments
	var sum float64
	for i, c := range counts {
		m.n += int(c)
		sum += float64(c) * scores[i]
	}
	if m.n == 0 {
		m.mean = math.NaN()
		return m
	}
	m.mean = sum / float64(m.n)
	for i, c := range counts {
		d := scores[i] - m.mean
		m.ss += float64(c) * d * d
	}
	return m
}

// standardizedDifference returns (focal mean − reference mean) / pooled standard
// deviation, the impact: it is not DIF. NaN where a group has fewer than two candidates
// or nobody differs.
func standardizedDifference(reference, focal scoreMoments) float64 {
	if reference.n < 2 || focal.n < 2 {
		return math.NaN()
	}
	pooled := math.Sqrt((reference.ss + focal.ss) / float64(reference.n+focal.n-2))
	if math.IsInf(pooled, 1) {
		return math.NaN()
	}
	return (focal.mean - reference.mean) / pooled
}

// coefficientAlpha returns (I/(I−1))(1 − Σ s_i²/s_X²) (Cronbach 1951, Psychometrika
// 16:297-334) from the sums of squared deviations of the items and of their total; NaN
// with fewer than two items or a total without variance.
func coefficientAlpha(itemSS []float64, totalSS float64) float64 {
	n := float64(len(itemSS))
	if n < 2 || !(totalSS > 0) {
		return math.NaN()
	}
	var sum float64
	for _, s := range itemSS {
		sum += s
	}
	return n / (n - 1) * (1 - sum/totalSS)
}

// normalDelta returns the ETS delta 13 + 4 Φ⁻¹(1 − p) of a proportion correct (Holland &
// Thayer 1985, ETS RR-85-43); NaN unless 0 < p < 1. Harder items have larger values.
func normalDelta(p float64) float64 {
	if !(p > 0 && p < 1) {
		return math.NaN()
	}
	return 13 - 4*normalQuantile(p)
}

// logisticDelta is the alternative 13 − (4/1.7) ln(p/(1−p)) of the same report.
func logisticDelta(p float64) float64 {
	if !(p > 0 && p < 1) {
		return math.NaN()
	}
	return 13 - 4/1.7*math.Log(p/(1-p))
}
