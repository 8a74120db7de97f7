package dif

import "math"

const idStandardization = "standardization"

// StandardizationResult is the standardized p-difference: how much more often focal
// candidates answered right than reference candidates matched to them, weighted by
// the focal distribution; negative when the item is harder for the focal group. Both
// values are nil when no stratum holds both groups. When no stratum is informative both
// are 0: the groups did not differ anywhere, and given the margins they could not have.
type StandardizationResult struct {
	PDif   *float64 `json:"p_dif"`
	PDifSE *float64 `json:"p_dif_se"`
}

// Columns implements Result.
func (r *StandardizationResult) Columns() []Column {
	return []Column{{"p_dif", "P-DIF", r.PDif}, {"p_dif_se", "SE", r.PDifSE}}
}

type standardization struct{}

func (standardization) ID() string  { return idStandardization }
func (standardization) New() Result { return &StandardizationResult{} }

// Test implements Method. Over comparable strata, degenerate ones included,
//
//	P-DIF = Σ n_F (C/n_F − A/n_R) / Σ n_F
//	SE²   = Σ (n_F/Σn_F)² (1/n_F + 1/n_R)² V
//
// with V the hypergeometric variance of the stratum. Sources: Dorans & Kulick (1986),
// J. Educ. Meas. 23:355-368; the standard error is the two-category case of Zwick &
// Thayer (1996), J. Educ. Behav. Stat. 21:187-201.
func (standardization) Test(t *ItemTable, _ Criteria) Result {
	if !t.Binary() {
		return nil
	}
	var sum, weights, variance float64
	for k := range t.Strata {
		x := t.table2x2(k)
		if !x.comparable() {
			continue
		}
		nF, nR := x.focal(), x.reference()
		sum += x.c - nF*x.a/nR
		weights += nF
		f := 1 + nF/nR // n_F (1/n_F + 1/n_R)
		variance += f * f * x.variance()
	}
	if weights == 0 {
		return &StandardizationResult{}
	}
	return &StandardizationResult{number(sum / weights), number(math.Sqrt(variance) / weights)}
}
