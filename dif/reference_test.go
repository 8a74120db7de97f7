package dif

import (
	"encoding/json"
	"math"
	"os"
	"slices"
	"testing"
)

// The expected values of these tests were computed by base R 4.2.2 and statsmodels
// 0.13.5; testdata/reference holds the scripts and, per folder, a SOURCE.md.

// near fails unless got is within a relative tolerance of want; a NaN fails.
func near(t *testing.T, what string, got, want, relative float64) {
	t.Helper()
	if !(math.Abs(got-want) <= relative*math.Max(1e-300, math.Abs(want))) {
		t.Errorf("%s = %v, want %v (relative %g)", what, got, want, relative)
	}
}

// within fails unless got is within an absolute tolerance of want, for printed values.
func within(t *testing.T, what string, got, want, absolute float64) {
	t.Helper()
	if !(math.Abs(got-want) <= absolute) {
		t.Errorf("%s = %v, want %v ± %g", what, got, want, absolute)
	}
}

// reference reads the expected values of one folder.
func reference[T any](t *testing.T, folder string) T {
	t.Helper()
	b, err := os.ReadFile("../testdata/reference/" + folder + "/values.json")
	if err != nil {
		t.Fatal(err)
	}
	var v T
	if err := json.Unmarshal(b, &v); err != nil {
		t.Fatal(err)
	}
	return v
}

// tableOf returns the table with strata given as score, reference right and wrong,
// focal right and wrong.
func tableOf(strata [][5]float64) *ItemTable {
	t := &ItemTable{Categories: 2}
	for _, s := range strata {
		t.Strata = append(t.Strata, Stratum{Score: s[0]})
		t.Counts = append(t.Counts, uint32(s[2]), uint32(s[1]), uint32(s[4]), uint32(s[3]))
	}
	return t
}

type expectedMH struct {
	Name, Check       string
	Strata            [][5]float64
	ChiSquare         float64  `json:"chi_square"`
	PValue            float64  `json:"p_value"`
	ChiSquareC        float64  `json:"chi_square_corrected"`
	PValueC           float64  `json:"p_value_corrected"`
	OddsRatio         *float64 `json:"odds_ratio"`
	LogOddsRatio      *float64 `json:"log_odds_ratio"`
	LogOddsRatioSE    *float64 `json:"log_odds_ratio_se"`
	Delta             *float64 `json:"delta"`
	DeltaSE           *float64 `json:"delta_se"`
	Exact             *float64 `json:"exact_p_value"`
	Class             string
	NReference        int     `json:"n_reference"`
	NFocal            int     `json:"n_focal"`
	NMatchedReference int     `json:"n_matched_reference"`
	NMatchedFocal     int     `json:"n_matched_focal"`
	StrataUsed        int     `json:"strata_used"`
	StrataInformative int     `json:"strata_informative"`
	PDif              float64 `json:"p_dif"`
	PDifSE            float64 `json:"p_dif_se"`
}

// check compares a result with the expected values to a relative 1e-9.
func (want expectedMH) check(t *testing.T, r *MantelHaenszelResult) {
	t.Helper()
	near(t, want.Name+" chi-square", value(r.ChiSquare), want.ChiSquare, 1e-9)
	near(t, want.Name+" p", value(r.PValue), want.PValue, 1e-9)
	near(t, want.Name+" corrected chi-square", value(r.ChiSquareCorrected), want.ChiSquareC, 1e-9)
	near(t, want.Name+" corrected p", value(r.PValueCorrected), want.PValueC, 1e-9)
	for _, v := range []struct {
		what      string
		got, want *float64
	}{
		{"odds ratio", r.OddsRatio, want.OddsRatio}, {"log odds ratio", r.LogOddsRatio, want.LogOddsRatio},
		{"SE", r.LogOddsRatioSE, want.LogOddsRatioSE}, {"delta", r.Delta, want.Delta}, {"delta SE", r.DeltaSE, want.DeltaSE},
	} {
		if v.want == nil {
			if v.got != nil {
				t.Errorf("%s %s = %v, want none", want.Name, v.what, *v.got)
			}
			continue
		}
		near(t, want.Name+" "+v.what, value(v.got), *v.want, 1e-9)
	}
}

// CV-05 to CV-09: published tables, the hand table with every edge, and sparse tables.
func TestMantelHaenszelAgreesWithBaseR(t *testing.T) {
	ref := reference[struct{ Tables, Sparse, Items []expectedMH }](t, "mantel-haenszel")
	cases := slices.Concat(ref.Tables, ref.Sparse, ref.Items)
	if len(cases) < 30 {
		t.Fatalf("%d cases", len(cases))
	}
	exact := 0
	for _, want := range cases {
		table := tableOf(want.Strata)
		r := mantelHaenszel{}.Test(table, DefaultPlan().Criteria).(*MantelHaenszelResult)
		want.check(t, r)
		if want.Exact != nil {
			near(t, want.Name+" exact p", exactTest(table), *want.Exact, 1e-9)
			if v := sumStrata(table).v; (r.ExactPValue != nil) != (v < exactBelow) {
				t.Errorf("%s: exact p given: %v, variance sum %v", want.Name, r.ExactPValue != nil, v)
			}
			exact++
		}
	}
	if exact < 9 {
		t.Errorf("only %d exact tests", exact)
	}
}

// CV-05 and CV-07 as published: a course's printed output for the Chinese smoking
// studies, and the statement on the rabbits in base R's help page.
func TestPublishedTables(t *testing.T) {
	ref := reference[struct{ Tables []expectedMH }](t, "mantel-haenszel")
	for _, c := range ref.Tables {
		table := tableOf(c.Strata)
		r := mantelHaenszel{}.Test(table, DefaultPlan().Criteria).(*MantelHaenszelResult)
		bd := breslowDay{}.Test(table, DefaultPlan().Criteria).(*BreslowDayResult)
		switch c.Check {
		case "CV-05":
			within(t, "CMH", value(r.ChiSquare), 280.138, 0.0005)
			within(t, "odds ratio", value(r.OddsRatio), 2.174, 0.0005)
			within(t, "Breslow-Day", value(bd.Statistic), 5.200, 0.0005)
			within(t, "Breslow-Day p", value(bd.PValue), 0.636, 0.0005)
			if bd.DF == nil || *bd.DF != 7 {
				t.Errorf("df = %v, want 7", bd.DF)
			}
		case "CV-06":
			within(t, "odds ratio", value(r.OddsRatio), 0.9046968, 5e-8)
			within(t, "delta", value(r.Delta), 0.2353652, 5e-8)
			within(t, "trend", value(bd.Trend.Statistic), 7.874812, 1e-6) // 7.8748126 by base R's uniroot
		case "CV-07":
			within(t, "p", value(r.PValueCorrected), 0.047, 0.0005)
			within(t, "exact p", value(r.ExactPValue), 0.040, 0.0005)
			within(t, "odds ratio", value(r.OddsRatio), 7, 5e-7)
		case "CV-08":
			cover := table.cover()
			if cover.comparable != 5 || cover.informative != 4 {
				t.Errorf("strata: %d comparable, %d informative, want 5 and 4", cover.comparable, cover.informative)
			}
			within(t, "delta", value(r.Delta), -1.229981015, 5e-10)
			within(t, "delta low", value(r.DeltaLow), -2.952410, 5e-7)
			within(t, "delta high", value(r.DeltaHigh), 0.492448, 5e-7)
		}
	}
}

func TestBreslowDayAgreesWithStatsmodels(t *testing.T) {
	type expected struct {
		Name            string
		Strata          [][5]float64
		Statistic       float64
		DF              int
		PValue          float64 `json:"p_value"`
		Tarone          float64
		TaroneP         float64 `json:"tarone_p_value"`
		TrendStatistic  float64 `json:"trend_statistic"`
		TrendStatisticP float64 `json:"trend_p_value"`
	}
	ref := reference[struct{ Tables, Items []expected }](t, "breslow-day")
	for _, want := range slices.Concat(ref.Tables, ref.Items) {
		r := breslowDay{}.Test(tableOf(want.Strata), Criteria{}).(*BreslowDayResult)
		if r.DF == nil || *r.DF != want.DF {
			t.Fatalf("%s df = %v, want %d", want.Name, r.DF, want.DF)
		}
		near(t, want.Name+" statistic", value(r.Statistic), want.Statistic, 1e-9)
		near(t, want.Name+" p", value(r.PValue), want.PValue, 1e-9)
		near(t, want.Name+" Tarone", value(r.Tarone), want.Tarone, 1e-9)
		near(t, want.Name+" Tarone p", value(r.TaronePValue), want.TaroneP, 1e-9)
		near(t, want.Name+" trend", value(r.Trend.Statistic), want.TrendStatistic, 1e-8)
		near(t, want.Name+" trend p", value(r.Trend.PValue), want.TrendStatisticP, 1e-8)
	}
}

func TestStandardizationAgreesWithBaseR(t *testing.T) {
	ref := reference[struct{ Tables, Items []expectedMH }](t, "standardization")
	for _, want := range slices.Concat(ref.Tables, ref.Items) {
		r := standardization{}.Test(tableOf(want.Strata), Criteria{}).(*StandardizationResult)
		near(t, want.Name+" P-DIF", value(r.PDif), want.PDif, 1e-9)
		near(t, want.Name+" SE", value(r.PDifSE), want.PDifSE, 1e-9)
	}
}

// CV-09, CV-20, CV-22, CV-41 and the alpha of CV-40 through the whole engine.
func TestVerbalAggressionThroughRun(t *testing.T) {
	ref := reference[struct{ Items []expectedMH }](t, "mantel-haenszel")
	q := reference[struct {
		Cases []struct {
			Q []float64 `json:"q_values"`
		}
	}](t, "multiplicity").Cases[0].Q
	std := reference[struct{ Items []expectedMH }](t, "standardization")
	e := mustRun(t, openPlan("gender", "F", "M", PurifyNone), verbalBinary(t))
	c := e.Comparisons[0]
	if len(c.Items) != 24 || len(c.Matching.Stages) != 1 {
		t.Fatalf("%d items, %d stages", len(c.Items), len(c.Matching.Stages))
	}
	for i, f := range c.Items {
		ref.Items[i].check(t, f.MantelHaenszel())
		near(t, f.Item+" q", value(f.MantelHaenszel().QValue), q[i], 1e-9)
		near(t, f.Item+" P-DIF", value(f.Standardization().PDif), std.Items[i].PDif, 1e-9)
	}
	letters := map[string]string{"S2WantShout": "C-", "S4WantShout": "B-", "S2DoCurse": "C+", "S2DoScold": "B+", "S3DoCurse": "B+", "S3DoScold": "B+"}
	for _, f := range c.Items {
		want := "A"
		if l, ok := letters[f.Item]; ok {
			want = l
		}
		if f.Classification.Class == nil || *f.Classification.Class != want {
			t.Errorf("%s: class %v, want %s (CV-09)", f.Item, f.Classification.Class, want)
		}
	}

	stats := reference[struct {
		Groups struct {
			Reference, Focal struct{ Mean, SD float64 }
			Difference       float64 `json:"standardized_mean_difference"`
		}
		Alpha struct{ Pooled float64 } `json:"coefficient_alpha"`
		Items []struct {
			Reference, Focal struct {
				N, P float64
				Rest float64 `json:"item_rest_correlation"`
			}
		}
	}](t, "item-statistics")
	g := c.Groups
	near(t, "reference mean", value(g.Reference.Mean), stats.Groups.Reference.Mean, 1e-12)
	near(t, "reference SD", value(g.Reference.SD), stats.Groups.Reference.SD, 1e-12)
	near(t, "focal mean", value(g.Focal.Mean), stats.Groups.Focal.Mean, 1e-12)
	near(t, "focal SD", value(g.Focal.SD), stats.Groups.Focal.SD, 1e-12)
	near(t, "d (CV-41)", value(g.Difference), stats.Groups.Difference, 1e-12)
	near(t, "alpha (CV-40)", value(c.Matching.Reliability), stats.Alpha.Pooled, 1e-12)
	for i, f := range c.Items {
		want := stats.Items[i]
		if float64(f.NReference) != want.Reference.N || float64(f.NFocal) != want.Focal.N {
			t.Errorf("%s: n %d and %d", f.Item, f.NReference, f.NFocal)
		}
		near(t, f.Item+" p reference", value(f.PReference), want.Reference.P, 1e-12)
		near(t, f.Item+" p focal", value(f.PFocal), want.Focal.P, 1e-12)
		near(t, f.Item+" item-rest reference", value(f.ItemRest.Reference), want.Reference.Rest, 1e-11)
		near(t, f.Item+" item-rest focal", value(f.ItemRest.Focal), want.Focal.Rest, 1e-11)
	}
}

// CV-22: the second pass of two-stage purification, every item with its own score put back.
func TestPurificationAgreesWithBaseR(t *testing.T) {
	stages := reference[struct {
		Stages []struct {
			Removed []string `json:"removed_items"`
			Items   []expectedMH
		}
	}](t, "purification").Stages
	c := mustRun(t, openPlan("gender", "F", "M", PurifyTwoStage), verbalBinary(t)).Comparisons[0]
	if !slices.Equal(c.Matching.RemovedItems, stages[1].Removed) {
		t.Fatalf("removed %v, want %v", c.Matching.RemovedItems, stages[1].Removed)
	}
	for i, f := range c.Items {
		want := stages[1].Items[i]
		want.check(t, f.MantelHaenszel())
		if *f.Classification.Class != want.Class {
			t.Errorf("%s: class %s, want %s", f.Item, *f.Classification.Class, want.Class)
		}
		first := c.Matching.Stages[0].Items[i]
		near(t, f.Item+" stage 1 delta", value(first.Delta), *stages[0].Items[i].Delta, 1e-9)
		if *first.ComputedClass != stages[0].Items[i].Class {
			t.Errorf("%s: stage 1 class %s, want %s", f.Item, *first.ComputedClass, stages[0].Items[i].Class)
		}
	}
	s2WantShout := c.Items[5].MantelHaenszel()
	within(t, "S2WantShout delta (CV-22)", value(s2WantShout.Delta), -2.26327, 5e-6)
	within(t, "S2WantShout SE (CV-22)", value(s2WantShout.DeltaSE), 0.78000, 5e-6)
}

// Candidates matched within the set presented, by base R on the health survey.
func TestPresentedSetsAgreeWithBaseR(t *testing.T) {
	ref := reference[struct {
		Comparisons []struct {
			Grouping, Reference, Focal string
			Items                      []expectedMH
		}
	}](t, "presented-sets")
	d := readScored(t, "../testdata/nz-health-survey/nz-worry.csv", 3)
	for _, want := range ref.Comparisons {
		c := mustRun(t, openPlan(want.Grouping, want.Reference, want.Focal, PurifyNone), d).Comparisons[0]
		if c.Matching.Variable != MatchTotalWithinSet {
			t.Errorf("variable %s", c.Matching.Variable)
		}
		for i, f := range c.Items {
			w := want.Items[i]
			w.check(t, f.MantelHaenszel())
			near(t, f.Item+" P-DIF", value(f.Standardization().PDif), w.PDif, 1e-9)
			near(t, f.Item+" P-DIF SE", value(f.Standardization().PDifSE), w.PDifSE, 1e-9)
			got := [6]int{f.NReference, f.NFocal, f.NMatchedReference, f.NMatchedFocal, f.StrataUsed, f.StrataInformative}
			if exp := [6]int{w.NReference, w.NFocal, w.NMatchedReference, w.NMatchedFocal, w.StrataUsed, w.StrataInformative}; got != exp {
				t.Errorf("%s counts %v, want %v", f.Item, got, exp)
			}
		}
	}
}

// Polytomous items are matched on; they have no statistic of their own yet.
func TestPolytomousItemsAreMatchedOn(t *testing.T) {
	ref := reference[struct {
		Groups struct {
			Reference, Focal struct{ Mean, SD float64 }
			Difference       float64 `json:"standardized_mean_difference"`
		}
		Alpha struct{ Pooled float64 } `json:"coefficient_alpha"`
	}](t, "polytomous-matching")
	d := readScored(t, "../testdata/verbal-aggression/verbal-polytomous.csv", 1)
	c := mustRun(t, openPlan("gender", "F", "M", PurifyTwoStage), d).Comparisons[0]
	near(t, "reference mean", value(c.Groups.Reference.Mean), ref.Groups.Reference.Mean, 1e-12)
	near(t, "focal SD", value(c.Groups.Focal.SD), ref.Groups.Focal.SD, 1e-12)
	near(t, "d", value(c.Groups.Difference), ref.Groups.Difference, 1e-12)
	near(t, "alpha (CV-40)", value(c.Matching.Reliability), ref.Alpha.Pooled, 1e-12)
	for _, f := range c.Items {
		k := f.Classification
		if len(f.Results) != 0 || k.Class != nil || k.ComputedClass != nil || *k.Reason != ReasonNotEstimable || *k.Detail != DetailMethodNotAvailable {
			t.Errorf("%s: %+v with %d results", f.Item, k, len(f.Results))
		}
	}
}

func TestDistributionsAgreeWithBaseR(t *testing.T) {
	ref := reference[struct {
		ChiSquare [][3]float64 `json:"chi_square_upper"`
		Upper     [][2]float64 `json:"normal_upper"`
		Quantile  [][2]float64 `json:"normal_upper_quantile"`
	}](t, "distributions")
	for _, v := range ref.ChiSquare {
		if v[2] >= 1e-300 {
			near(t, "chi-square tail", chiSquareTail(v[1], int(v[0])), v[2], 1e-10)
		}
	}
	for _, v := range ref.Upper {
		if v[1] >= 1e-300 {
			near(t, "normal tail", normalTail(v[0]), v[1], 1e-10)
		}
	}
	for _, v := range ref.Quantile {
		if v[0] > 1e-15 && v[0] < 1 && v[1] != 0 {
			near(t, "normal quantile", -normalQuantile(v[0]), v[1], 1e-10)
		}
	}
}

func TestExtremeProbabilityAgreesWithEnumeration(t *testing.T) {
	ref := reference[struct {
		Cases []struct {
			Name   string
			Strata [][5]float64
			Min    float64 `json:"probability_minimum"`
			Max    float64 `json:"probability_maximum"`
		}
	}](t, "noncentral")
	for _, c := range ref.Cases {
		table := tableOf(c.Strata)
		near(t, c.Name+" minimum", extremeProbability(table, 1), c.Min, 1e-9)
		near(t, c.Name+" maximum", extremeProbability(table, -1), c.Max, 1e-9)
	}
}

func TestBenjaminiHochbergAgreesWithBaseR(t *testing.T) {
	ref := reference[struct {
		Cases []struct {
			P []float64 `json:"p_values"`
			Q []float64 `json:"q_values"`
		}
	}](t, "multiplicity")
	for _, c := range ref.Cases {
		for i, q := range benjaminiHochberg(c.P) {
			near(t, "q", q, c.Q[i], 1e-12)
		}
	}
	withGap := benjaminiHochberg([]float64{0.02, math.NaN(), 0.01})
	if !math.IsNaN(withGap[1]) || withGap[0] != 0.02 || withGap[2] != 0.02 {
		t.Errorf("a missing p-value must not count in the family: %v", withGap)
	}
}
