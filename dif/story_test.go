package dif

import (
	"fmt"
	"math"
	"testing"
)

// planted collects candidates with a matching score of their own (external_score), so
// that the tables of single items can be planted.
type planted struct {
	items []string
	rows  []plantedRow
}

type plantedRow struct {
	level   float64
	group   uint16 // 1 reference, 2 focal
	answers map[string]byte
}

func (p *planted) add(n int, level float64, group uint16, item string, score byte) {
	for range n {
		p.rows = append(p.rows, plantedRow{level, group, map[string]byte{item: score}})
	}
}

// data returns the candidates; an item somebody does not name was not presented to them.
func (p *planted) data() *Data {
	d := &Data{IDs: &IDs{}, Answers: NewAnswers(len(p.items)), Received: len(p.rows)}
	for _, id := range p.items {
		d.Items = append(d.Items, Item{ID: id, Version: "1", Role: RoleOperational, MaxScore: 1})
	}
	g := Grouping{Name: "group", Labels: []string{"focal", "reference"}}
	for i, r := range p.rows {
		d.IDs.Append(fmt.Appendf(nil, "%06d", i))
		row := d.Answers.Append()
		for j, id := range p.items {
			row[j] = CodeNotPresented
			if s, ok := r.answers[id]; ok {
				row[j] = s
			}
		}
		d.External = append(d.External, r.level)
		g.Codes = append(g.Codes, 3-r.group) // labels are sorted: focal first
	}
	d.Groupings = []Grouping{g}
	return d
}

// Acceptance story: items that cannot be compared. The values are the story's, and for
// the statistics agree with base R's mantelhaen.test on the comparable strata.
func TestItemsThatCannotBeCompared(t *testing.T) {
	p := planted{items: []string{"a", "b", "c", "d", "e", "f"}}
	for level := range 10 { // (a) 300 of 300 correct
		p.add(20, float64(level), 1, "a", 1)
		p.add(10, float64(level), 2, "a", 1)
	}
	// (c) (right, wrong): (10,0)/(5,0); (8,2)/(4,4); (3,0)/none
	p.add(10, 101, 1, "c", 1)
	p.add(5, 101, 2, "c", 1)
	p.add(8, 102, 1, "c", 1)
	p.add(2, 102, 1, "c", 0)
	p.add(4, 102, 2, "c", 1)
	p.add(4, 102, 2, "c", 0)
	p.add(3, 103, 1, "c", 1)
	// (d) one level, (5,5)/(6,0)
	p.add(5, 200, 1, "d", 1)
	p.add(5, 200, 1, "d", 0)
	p.add(6, 200, 2, "d", 1)
	// (e) levels that hold one person each, beside one level that can be compared
	for i := range 12 {
		p.add(1, 300+float64(i), uint16(1+i%2), "e", byte(i%3%2))
	}
	p.add(15, 320, 1, "e", 1)
	p.add(6, 320, 1, "e", 0)
	p.add(9, 320, 2, "e", 1)
	p.add(7, 320, 2, "e", 0)
	// (f) no score in common
	p.add(30, 400, 1, "f", 1)
	p.add(30, 400, 1, "f", 0)
	p.add(30, 401, 2, "f", 1)
	p.add(30, 401, 2, "f", 0)
	d := p.data()

	plan := openPlan("group", "reference", "focal", PurifyTwoStage)
	plan.Matching.Variable = MatchExternal
	e := mustRun(t, plan, d)
	f := map[string]*Finding{}
	for i := range e.Comparisons[0].Items {
		f[e.Comparisons[0].Items[i].Item] = &e.Comparisons[0].Items[i]
	}
	reason := func(item, want, detail string) {
		t.Helper()
		k := f[item].Classification
		if k.Class != nil || k.Reason == nil || *k.Reason != want {
			t.Errorf("(%s) class %v, reason %v, want no verdict, %s", item, deref(k.Class), deref(k.Reason), want)
		}
		if deref(k.Detail) != detail {
			t.Errorf("(%s) detail %q, want %q", item, deref(k.Detail), detail)
		}
	}
	reason("a", ReasonNoVariation, DetailNoInformativeStrata)
	reason("b", ReasonNotPresented, DetailNoResponses)
	reason("c", ReasonTooFewInformative, "")
	reason("d", ReasonNoVariationInGroup, DetailInfiniteOddsRatio)
	reason("f", ReasonNoScoreOverlap, DetailNoInformativeStrata)

	c := f["c"]
	mh := c.MantelHaenszel()
	within(t, "(c) odds ratio", value(mh.OddsRatio), 4, 1e-12)
	within(t, "(c) delta", value(mh.Delta), -3.258, 5e-4)
	within(t, "(c) SE", value(mh.DeltaSE), 2.493, 5e-4)
	within(t, "(c) chi-square", value(mh.ChiSquare), 1.700, 5e-4)
	within(t, "(c) p", value(mh.PValue), 0.192, 5e-4)
	within(t, "(c) corrected", value(mh.ChiSquareCorrected), 0.664, 5e-4)
	within(t, "(c) corrected p", value(mh.PValueCorrected), 0.415, 5e-4)
	if n := c.NMatchedReference + c.NMatchedFocal; n != 33 || c.NReference+c.NFocal != 36 || c.NInformative != 18 {
		t.Errorf("(c) %d of %d candidates, %d informative", n, c.NReference+c.NFocal, c.NInformative)
	}
	if deref(c.Classification.ComputedClass) != ClassA {
		t.Errorf("(c) computed class %s", deref(c.Classification.ComputedClass))
	}
	mh = f["d"].MantelHaenszel()
	within(t, "(d) chi-square", value(mh.ChiSquare), 4.091, 5e-4)
	within(t, "(d) p", value(mh.PValue), 0.043, 5e-4)
	within(t, "(d) corrected", value(mh.ChiSquareCorrected), 2.200, 5e-4)
	within(t, "(d) corrected p", value(mh.PValueCorrected), 0.138, 5e-4)
	if mh.OddsRatio != nil || mh.LogOddsRatio != nil || mh.Delta != nil || mh.DeltaSE != nil || mh.DeltaLow != nil || mh.DeltaHigh != nil {
		t.Errorf("(d) a value without limit was given: %+v", mh)
	}
	if !hasWarning(f["d"].Warnings, WarnDirectionWithoutLimit) {
		t.Errorf("(d) warnings %v", f["d"].Warnings)
	}
	if f["e"].StrataUsed != 1 || f["e"].NReference+f["e"].NFocal != 49 || f["e"].NMatchedReference+f["e"].NMatchedFocal != 37 {
		t.Errorf("(e) %+v", f["e"].FindingCounts)
	}
	if e.Comparisons[0].Summary.Classes.Total()+e.Comparisons[0].Summary.NoVerdict.Total() != len(p.items) {
		t.Errorf("the summary loses items: %+v", e.Comparisons[0].Summary)
	}

	// Under the default minima (c) has too few candidates before it has too few informative ones.
	plan.Criteria = DefaultPlan().Criteria
	k := mustRun(t, plan, d).Comparisons[0].Items[2].Classification
	if deref(k.Reason) != ReasonTooFewCandidates || k.Class != nil || deref(k.ComputedClass) != ClassA {
		t.Errorf("(c) under the default minima: %s, computed %s", deref(k.Reason), deref(k.ComputedClass))
	}
}

func deref(s *string) string {
	if s == nil {
		return ""
	}
	return *s
}

// Acceptance story: a group too small. No item gets a letter, all are counted, and the
// statistics stand all the same.
func TestGroupTooSmallGivesNoVerdictForEveryItem(t *testing.T) {
	p := openPlan("gender", "F", "M", PurifyTwoStage)
	p.Criteria.MinSmallerGroup, p.Criteria.MinTotal = 100, 300
	c := mustRun(t, p, verbalBinary(t)).Comparisons[0]
	if got := c.Summary.NoVerdict.Of(ReasonTooFewCandidates); got != 24 || c.Summary.Classes.Total() != 0 {
		t.Errorf("no verdict %v, classes %v", c.Summary.NoVerdict, c.Summary.Classes)
	}
	near(t, "chance", c.Summary.ExpectedByChance.Significant, 24*0.05, 1e-12)
	if c.Summary.ExpectedByChance.BOrC != 0 {
		t.Errorf("letters by chance among no letters: %v", c.Summary.ExpectedByChance.BOrC)
	}
	for _, f := range c.Items {
		mh := f.MantelHaenszel()
		if f.Classification.Class != nil || f.Classification.ComputedClass == nil || mh.Delta == nil || mh.DeltaSE == nil {
			t.Errorf("%s: %+v", f.Item, f.Classification)
		}
	}
	if !slicesContainsStage(c.Matching.Stages, "S2WantShout", ClassCMinus) {
		t.Error("purification must use the computed letters")
	}
}

func slicesContainsStage(stages []Stage, item, letter string) bool {
	for _, s := range stages {
		for _, i := range s.Items {
			if i.Item == item && deref(i.ComputedClass) == letter {
				return true
			}
		}
	}
	return false
}

// CV-17: the boundaries of the letters.
func TestLetterBoundaries(t *testing.T) {
	for _, c := range []struct {
		delta, se float64
		want      string
	}{
		{1.0, .30, "B+"}, {.999999, .10, "A"}, {1.5, .30, "C+"}, {1.5, .31, "B+"}, {-1.49, .10, "B-"}, {2.5, 1.0, "B+"},
		{1.8, 1.0, "A"}, {-2.48612, .79244, "C-"}, {2.67085, 1.00357, "C+"}, {2.30724, .85849, "B+"},
	} {
		got, ok := Letter(c.delta, c.se, 2*normalTail(math.Abs(c.delta)/c.se), 0.05)
		if !ok || got != c.want {
			t.Errorf("Letter(%v, %v) = %q, want %q", c.delta, c.se, got, c.want)
		}
	}
	for _, se := range []float64{0, -1, math.NaN(), math.Inf(1)} {
		if l, ok := Letter(2, se, 0.01, 0.05); ok {
			t.Errorf("a letter %s with standard error %v", l, se)
		}
	}
}

// CV-44: rates of letters when no item differs.
func TestChanceOfLetters(t *testing.T) {
	for _, c := range []struct{ se, bOrC, large, tolB, tolC float64 }{
		{.4, .0124193, 3.4003e-5, 5e-8, 5e-10}, {.6, .05, 9.2791e-4, 5e-8, 5e-9}, {.8, .05, .0037934, 5e-8, 5e-8}, {1.0, .05, .0081726, 5e-8, 5e-8},
	} {
		b, large := chanceOfLetters(c.se, 0.05)
		within(t, fmt.Sprintf("B or C at %v", c.se), b, c.bOrC, c.tolB)
		within(t, fmt.Sprintf("C at %v", c.se), large, c.large, c.tolC)
	}
}

// CV-01, CV-02: item difficulty on the delta scale, and how far the logistic curve is
// from the normal ogive.
func TestDifficultyScales(t *testing.T) {
	for _, c := range []struct{ p, normal, logistic float64 }{
		{.5, 13, 13}, {.84, 9.022168, 9.098287}, {.16, 16.977832, 16.901713}, {.90, 7.873794, 7.830060},
		{.05, 19.579415, 19.928092}, {.975, 5.160144, 4.379855},
	} {
		within(t, fmt.Sprintf("normal delta of %v", c.p), normalDelta(c.p), c.normal, 5e-7)
		within(t, fmt.Sprintf("logistic delta of %v", c.p), logisticDelta(c.p), c.logistic, 5e-7)
	}
	for _, p := range []float64{0, 1, math.NaN()} {
		if !math.IsNaN(normalDelta(p)) {
			t.Errorf("delta of %v exists", p)
		}
	}
	for _, c := range []struct{ scale, distance float64 }{{1.702, .009486}, {1.7, .009561}} {
		largest := 0.0
		for x := 0.0; x < 6; x += 1e-4 {
			largest = math.Max(largest, math.Abs(normalTail(-x)-1/(1+math.Exp(-c.scale*x))))
		}
		within(t, "distance", largest, c.distance, 5e-7)
	}
}

// CV-04: item-rest correlations and coefficient alpha of a toy test.
func TestToyItemStatistics(t *testing.T) {
	rows := []string{"1111", "1110", "1101", "1010", "1100", "0100", "1000", "0000"}
	d := &Data{IDs: &IDs{}, Answers: NewAnswers(4), Received: 16}
	for i := range 4 {
		d.Items = append(d.Items, Item{ID: fmt.Sprint("i", i+1), Version: "1", Role: RoleOperational, MaxScore: 1})
	}
	g := Grouping{Name: "g", Labels: []string{"f", "r"}}
	for c := range 16 { // the same eight people in both groups
		d.IDs.Append(fmt.Appendf(nil, "%02d", c))
		row := d.Answers.Append()
		for i := range row {
			row[i] = rows[c%8][i] - '0'
		}
		g.Codes = append(g.Codes, uint16(1+c/8))
	}
	d.Groupings = []Grouping{g}
	c := mustRun(t, openPlan("g", "r", "f", PurifyNone), d).Comparisons[0]
	p := []float64{.75, .625, .375, .25}
	rest := []float64{.447214, .292770, .292770, .447214}
	for i, f := range c.Items {
		near(t, "p", value(f.PReference), p[i], 1e-12)
		within(t, "item-rest", value(f.ItemRest.Focal), rest[i], 5e-7)
	}
	within(t, "alpha", value(c.Matching.Reliability), .583333, 5e-7)
}

// CV-21: under the Rasch model total-score matching that contains the studied item gives an
// odds ratio of exactly 1; rest-score matching invents a difference. The population tables
// come from the score recursion of Lord & Wingersky (1984).
func TestMatchingContainsTheStudiedItem(t *testing.T) {
	type expected struct {
		OddsRatio float64 `json:"odds_ratio"`
	}
	ref := reference[struct {
		Designs []struct {
			Name       string
			Slopes     []float64
			B          []float64 `json:"difficulties"`
			Studied    int
			FocalMean  float64  `json:"focal_mean"`
			TotalScore expected `json:"total_score"`
			RestScore  expected `json:"rest_score"`
		}
	}](t, "population")
	for _, d := range ref.Designs {
		items := len(d.Slopes)
		var right, wrong [2][]float64 // by rest score
		for g, mean := range []float64{0, d.FocalMean} {
			right[g], wrong[g] = make([]float64, items), make([]float64, items)
			for q := -800; q <= 800; q++ {
				theta := mean + float64(q)/100
				density := math.Exp(-(theta-mean)*(theta-mean)/2) / math.Sqrt(2*math.Pi) / 100
				scores := []float64{density}
				var studied float64
				for i := range items {
					p := 1 / (1 + math.Exp(-d.Slopes[i]*(theta-d.B[i])))
					if i == d.Studied-1 {
						studied = p
						continue
					}
					next := make([]float64, len(scores)+1)
					for s, v := range scores {
						next[s] += v * (1 - p)
						next[s+1] += v * p
					}
					scores = next
				}
				for s, v := range scores {
					right[g][s] += v * studied
					wrong[g][s] += v * (1 - studied)
				}
			}
		}
		table := func(shift int) *ItemTable {
			n := func(v float64) uint32 { return uint32(math.Round(v * 4e9)) }
			tab := &ItemTable{Categories: 2}
			at := func(v []float64, s int) uint32 {
				if s < 0 || s >= len(v) {
					return 0
				}
				return n(v[s])
			}
			for s := range items + 1 {
				tab.Strata = append(tab.Strata, Stratum{Score: float64(s)})
				tab.Counts = append(tab.Counts, at(wrong[0], s), at(right[0], s-shift), at(wrong[1], s), at(right[1], s-shift))
			}
			return tab
		}
		total, rest := sumStrata(table(1)), sumStrata(table(0))
		near(t, d.Name+" total", total.r/total.s, d.TotalScore.OddsRatio, 5e-7)
		near(t, d.Name+" rest", rest.r/rest.s, d.RestScore.OddsRatio, 5e-7)
	}
}
