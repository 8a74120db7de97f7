package simulate

import "math"

// The normal distribution of ability is summed over this many equal steps within
// this many standard deviations; for item response functions the error is far below
// 1e-8.
const (
	abilitySteps = 800
	abilityReach = 8.0
)

// Where two groups are compared, the sum runs over this many steps of the abilities
// within this many standard deviations of both means.
const (
	overlapSteps = 1600
	overlapReach = 16.0
)

// expectedCorrect is the expected proportion correct of an item in a group.
func expectedCorrect(p Parameters, g Group) float64 {
	if g.SD == 0 {
		return p.Correct(g.Mean)
	}
	sum, weights := 0.0, 0.0
	for k := range abilitySteps + 1 {
		z := abilityReach * (2*float64(k)/abilitySteps - 1)
		w := math.Exp(-z * z / 2)
		sum += w * p.Correct(g.Mean+g.SD*z)
		weights += w
	}
	return sum / weights
}

// populationDelta is the D-DIF that the Mantel-Haenszel method has in the limit of
// many candidates matched on ability itself:
//
//	w(θ) = π_R f_R π_F f_F / (π_R f_R + π_F f_F)
//	Delta = -2.35 ln( ∫ w P_R (1 - P_F) / ∫ w P_F (1 - P_R) )
//
// with the densities f of ability and the shares π of candidates. ok is false where
// ability is fixed in a group, or the groups have no ability in common.
//
// Source: Roussos, Schnipke & Pashley (1999), Journal of Educational and Behavioral
// Statistics 24:293-322 (from memory); the weights are the large-sample form of
// n_R n_F / T.
func populationDelta(pr, pf Parameters, r, f Group) (delta float64, ok bool) {
	switch {
	case r.SD == 0 || f.SD == 0:
		return 0, false
	case pr.equal(pf):
		return 0, true
	}
	low := max(r.Mean-overlapReach*r.SD, f.Mean-overlapReach*f.SD)
	high := min(r.Mean+overlapReach*r.SD, f.Mean+overlapReach*f.SD)
	if !(low < high) {
		return 0, false
	}
	var num, den float64
	for k := range overlapSteps + 1 {
		theta := low + (high-low)*float64(k)/overlapSteps
		zr, zf := (theta-r.Mean)/r.SD, (theta-f.Mean)/f.SD
		wr := float64(r.N) / r.SD * math.Exp(-zr*zr/2)
		wf := float64(f.N) / f.SD * math.Exp(-zf*zf/2)
		if wr == 0 || wf == 0 {
			continue
		}
		w := wr / (wr + wf) * wf
		p, q := pr.Correct(theta), pf.Correct(theta)
		num += w * p * (1 - q)
		den += w * q * (1 - p)
	}
	delta = -deltaScale * math.Log(num/den)
	if math.IsNaN(delta) || math.IsInf(delta, 0) {
		return 0, false
	}
	return delta, true
}
