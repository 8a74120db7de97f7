package dif

import "math"

const idBreslowDay = "breslow_day"

// BreslowDayResult tests whether the odds ratio is the same at every matching level;
// a small p-value points to DIF that changes with ability. All values are nil when
// fewer than two strata are informative or the common odds ratio is not finite.
type BreslowDayResult struct {
	Statistic    *float64 `json:"statistic"`
	DF           *int     `json:"df"`
	PValue       *float64 `json:"p_value"`
	Tarone       *float64 `json:"tarone"`
	TaronePValue *float64 `json:"tarone_p_value"`
	Trend        Trend    `json:"trend"`
}

// Trend is the test for a log odds ratio that rises or falls with the matching
// score, one degree of freedom.
type Trend struct {
	Statistic *float64 `json:"statistic"`
	PValue    *float64 `json:"p_value"`
}

// Columns implements Result.
func (r *BreslowDayResult) Columns() []Column {
	var df *float64
	if r.DF != nil {
		df = number(float64(*r.DF))
	}
	return []Column{
		{"statistic", "B-D", r.Statistic}, {"df", "df", df}, {"p_value", "p", r.PValue},
		{"tarone", "Tarone", r.Tarone}, {"tarone_p_value", "p", r.TaronePValue},
		{"trend_statistic", "trend", r.Trend.Statistic}, {"trend_p_value", "p", r.Trend.PValue},
	}
}

// expectedCell returns the expected number of right answers of the reference group
// in a table with the given margins whose odds ratio is alpha, 0 < alpha < ∞:
//
//	(1 − α) a² + (n_F − m_1 + α (n_R + m_1)) a − α n_R m_1 = 0
//
// The root is taken in the form that does not cancel; one formula serves α = 1.
func expectedCell(x cells, alpha float64) float64 {
	q2 := 1 - alpha
	q1 := x.focal() - x.right() + alpha*(x.reference()+x.right())
	q0 := -alpha * x.reference() * x.right()
	root := math.Sqrt(q1*q1 - 4*q2*q0)
	if q1 < 0 {
		return (-q1 + root) / (2 * q2)
	}
	return -2 * q0 / (q1 + root)
}

type breslowDay struct{}

func (breslowDay) ID() string  { return idBreslowDay }
func (breslowDay) New() Result { return &BreslowDayResult{} }

// Test implements Method. With a_k the expected cell and v_k its variance under the
// common odds ratio,
//
//	B-D    = Σ (A − a)² / v                        df = informative strata − 1
//	Tarone = B-D − (ΣA − Σa)² / Σv                 same df
//	trend  = (Σ (x − x̄)(A − a))² / (Σ x²v − (Σxv)²/Σv),  x̄ = Σxv/Σv
//
// with x the matching score. The trend is centred so that it does not change when a
// constant is added to x. Sources: Breslow & Day (1980), Statistical Methods in Cancer
// Research 1; Tarone (1985), Biometrika 72:91-95; Penfield (2003) for the use of the
// trend on items.
func (breslowDay) Test(t *ItemTable, _ Criteria) Result {
	if !t.Binary() {
		return nil
	}
	r := &BreslowDayResult{}
	m := sumStrata(t)
	if m.r == 0 || m.s == 0 {
		return r
	}
	alpha := m.r / m.s
	type term struct{ x, residual, v float64 }
	terms := make([]term, 0, len(t.Strata))
	var bd, sumResidual, sumV, sumXV float64
	for k := range t.Strata {
		x := t.table2x2(k)
		if !x.informative() {
			continue
		}
		a := expectedCell(x, alpha)
		v := 1 / (1/a + 1/(x.reference()-a) + 1/(x.right()-a) + 1/(x.focal()-x.right()+a))
		residual := x.a - a
		bd += residual * residual / v
		sumResidual += residual
		sumV += v
		sumXV += t.Strata[k].Score * v
		terms = append(terms, term{t.Strata[k].Score, residual, v})
	}
	df := len(terms) - 1
	if df < 1 {
		return r
	}
	mean := sumXV / sumV
	var top, bottom float64
	for _, e := range terms {
		top += (e.x - mean) * e.residual
		bottom += (e.x - mean) * (e.x - mean) * e.v
	}
	tarone := math.Max(0, bd-sumResidual*sumResidual/sumV)
	r.Statistic, r.PValue = number(bd), number(chiSquareTail(bd, df))
	r.Tarone, r.TaronePValue = number(tarone), number(chiSquareTail(tarone, df))
	if r.Statistic != nil {
		r.DF = &df
	}
	if bottom > 0 {
		trend := top * top / bottom
		r.Trend = Trend{number(trend), number(chiSquareTail(trend, 1))}
	}
	return r
}
