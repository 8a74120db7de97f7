package dif

import "math"

const idMantelHaenszel = "mantel_haenszel"

// deltaScale turns a log odds ratio into D-DIF; the published index uses 2.35 for
// 4/1.7 (Holland & Thayer 1988).
const deltaScale = 2.35

// exactBelow is the sum of hypergeometric variances below which the exact
// conditional test is given beside the chi-square.
const exactBelow = 5

// MantelHaenszelResult is the Mantel-Haenszel test and the common odds ratio of one
// item. OddsRatio and LogOddsRatio are reference over focal; Delta (D-DIF) is
// negative when the item is harder for the focal group. ChiSquare has one degree of
// freedom; it is nil when no stratum is informative. The odds ratio and what is
// derived from it are nil when it would be zero or infinite.
type MantelHaenszelResult struct {
	ChiSquare          *float64 `json:"chi_square"`
	PValue             *float64 `json:"p_value"`
	ChiSquareCorrected *float64 `json:"chi_square_corrected"`
	PValueCorrected    *float64 `json:"p_value_corrected"`
	OddsRatio          *float64 `json:"odds_ratio"`
	LogOddsRatio       *float64 `json:"log_odds_ratio"`
	LogOddsRatioSE     *float64 `json:"log_odds_ratio_se"`
	Delta              *float64 `json:"delta"`
	DeltaSE            *float64 `json:"delta_se"`
	DeltaLow           *float64 `json:"delta_low"`
	DeltaHigh          *float64 `json:"delta_high"`
	QValue             *float64 `json:"q_value"`
	ExactPValue        *float64 `json:"exact_p_value"`    // where the hypergeometric variances sum to less than 5
	DetectableDelta    *float64 `json:"detectable_delta"` // found with 80 % power at class_alpha
}

// Columns implements Result.
func (r *MantelHaenszelResult) Columns() []Column {
	return []Column{
		{"chi_square", "χ²", r.ChiSquare}, {"p_value", "p", r.PValue},
		{"chi_square_corrected", "χ² corr.", r.ChiSquareCorrected}, {"p_value_corrected", "p corr.", r.PValueCorrected},
		{"odds_ratio", "odds ratio", r.OddsRatio}, {"log_odds_ratio", "ln OR", r.LogOddsRatio},
		{"log_odds_ratio_se", "SE ln OR", r.LogOddsRatioSE},
		{"delta", "D-DIF", r.Delta}, {"delta_se", "SE", r.DeltaSE}, {"delta_low", "low", r.DeltaLow}, {"delta_high", "high", r.DeltaHigh},
		{"q_value", "q", r.QValue}, {"exact_p_value", "exact p", r.ExactPValue}, {"detectable_delta", "detectable", r.DetectableDelta},
	}
}

// mhSums are the sums over strata that the Mantel-Haenszel family needs.
type mhSums struct {
	a, e, v    float64 // right answers of the reference group: observed, expected, variance
	r, s       float64 // numerator and denominator of the common odds ratio
	pr, psq, q float64 // Robins-Breslow-Greenland sums: P·R, P·S + Q·R, Q·S
}

// sumStrata adds up the informative strata; the others add nothing to any sum.
func sumStrata(t *ItemTable) mhSums {
	var m mhSums
	for k := range t.Strata {
		x := t.table2x2(k)
		if !x.informative() {
			continue
		}
		total := x.total()
		m.a += x.a
		m.e += x.reference() * x.right() / total
		m.v += x.variance()
		r, s := x.a*x.d/total, x.b*x.c/total
		p, q := (x.a+x.d)/total, (x.b+x.c)/total
		m.r += r
		m.s += s
		m.pr += p * r
		m.psq += p*s + q*r
		m.q += q * s
	}
	return m
}

// chiSquare returns the test of no association given the strata (Mantel & Haenszel
// 1959, J. Natl. Cancer Inst. 22:719-748), without and with the correction of one
// half; NaN when no stratum is informative.
//
//	χ² = (ΣA − ΣE)² / ΣV        corrected: max(0, |ΣA − ΣE| − ½)² / ΣV
func (m mhSums) chiSquare() (plain, corrected float64) {
	if m.v == 0 {
		return math.NaN(), math.NaN()
	}
	d := math.Abs(m.a - m.e)
	c := math.Max(0, d-0.5)
	return d * d / m.v, c * c / m.v
}

// logOddsRatio returns ln(ΣR / ΣS) and its standard error after Robins, Breslow &
// Greenland (1986), Biometrics 42:311-323; NaN when either sum is zero.
//
//	Var = ΣPR/(2R²) + Σ(PS + QR)/(2RS) + ΣQS/(2S²)
func (m mhSums) logOddsRatio() (lambda, se float64) {
	if m.r == 0 || m.s == 0 {
		return math.NaN(), math.NaN()
	}
	v := m.pr/(2*m.r*m.r) + m.psq/(2*m.r*m.s) + m.q/(2*m.s*m.s)
	return math.Log(m.r / m.s), math.Sqrt(v)
}

// delta returns D-DIF = -2.35 ln(odds ratio) and its standard error (Holland &
// Thayer 1988).
func (m mhSums) delta() (delta, se float64) {
	lambda, s := m.logOddsRatio()
	return -deltaScale * lambda, deltaScale * s
}

// limitless reports whether the odds ratio is zero or infinite, and the direction:
// -1 harder for the focal group without limit, 1 easier, 0 when it is finite or no
// stratum is informative.
func (m mhSums) limitless() int {
	switch {
	case m.v == 0 || m.r > 0 && m.s > 0:
		return 0
	case m.s == 0:
		return -1
	}
	return 1
}

type mantelHaenszel struct{}

func (mantelHaenszel) ID() string  { return idMantelHaenszel }
func (mantelHaenszel) New() Result { return &MantelHaenszelResult{} }

// Test implements Method.
func (mantelHaenszel) Test(t *ItemTable, c Criteria) Result {
	if !t.Binary() {
		return nil
	}
	m := sumStrata(t)
	chi, corrected := m.chiSquare()
	lambda, se := m.logOddsRatio()
	delta, deltaSE := m.delta()
	half := normalQuantile(0.975) * deltaSE
	r := &MantelHaenszelResult{
		ChiSquare: number(chi), PValue: number(chiSquareTail(chi, 1)),
		ChiSquareCorrected: number(corrected), PValueCorrected: number(chiSquareTail(corrected, 1)),
		OddsRatio: number(m.r / m.s), LogOddsRatio: number(lambda), LogOddsRatioSE: number(se),
		Delta: number(delta), DeltaSE: number(deltaSE),
		DeltaLow: number(delta - half), DeltaHigh: number(delta + half),
		DetectableDelta: number((normalQuantile(1-c.ClassAlpha/2) + normalQuantile(0.80)) * deltaSE),
	}
	if m.limitless() != 0 {
		r.OddsRatio = nil
	}
	if m.v > 0 && m.v < exactBelow {
		r.ExactPValue = number(exactTest(t))
	}
	return r
}
