package dif

import (
	"fmt"
	"math"
	"testing"
)

// blockData returns candidates of two blocks of ten items each, n per block, and a few
// who took both; half of each are focal. Answers follow a fixed pattern with some order.
func blockData(n, both int) *Data {
	d := &Data{IDs: &IDs{}, Answers: NewAnswers(20), Received: 2*n + both}
	for i := range 20 {
		d.Items = append(d.Items, Item{ID: fmt.Sprint("i", i), Version: "1", Role: RoleOperational, MaxScore: 1})
	}
	g := Grouping{Name: "g", Labels: []string{"f", "r"}}
	for c := range d.Received {
		d.IDs.Append(fmt.Appendf(nil, "%05d", c))
		g.Codes = append(g.Codes, uint16(1+c%2))
		row := d.Answers.Append()
		for i := range row {
			switch {
			case c < n && i >= 10, c >= n && c < 2*n && i < 10:
				row[i] = CodeNotPresented
			case (c*7+i*i*3+c*i)%11 < c%11:
				row[i] = 1
			}
		}
	}
	d.Groupings = []Grouping{g}
	return d
}

// Reliability is that of the many: a handful of candidates who took everything does not
// speak for the score, and blocks of equal size count alike.
func TestReliabilityOfPresentedSets(t *testing.T) {
	t.Parallel()
	p := openPlan("g", "r", "f", PurifyNone)
	alpha := func(d *Data) float64 { return value(mustRun(t, p, d).Comparisons[0].Matching.Reliability) }
	block := func(from int) float64 { // one block on its own
		d := blockData(300, 0)
		one := &Data{IDs: &IDs{}, Answers: NewAnswers(10), Items: d.Items[from : from+10], Received: 300}
		g := Grouping{Name: "g", Labels: d.Groupings[0].Labels}
		for c := range 300 {
			c += from * 30
			one.IDs.Append(d.IDs.At(c))
			copy(one.Answers.Append(), d.Answers.Row(c)[from:from+10])
			g.Codes = append(g.Codes, d.Groupings[0].Codes[c])
		}
		one.Groupings = []Grouping{g}
		return alpha(one)
	}
	want := (block(0) + block(10)) / 2
	near(t, "two blocks", alpha(blockData(300, 0)), want, 1e-12)
	near(t, "two blocks and four who took both", alpha(blockData(300, 4)), want, 1e-12)
}

// Where a form has no key for an item that another form scores, the item is not presented
// on that form, whether it was answered, omitted or not reached.
func TestItemKeyedOnOneFormOnly(t *testing.T) {
	t.Parallel()
	d := mixedData(8, 900, 9)
	d.Items[2].Key = nil
	d.Forms[1].Items = nil
	for i := range d.Items {
		fi := FormItem{Item: i, Position: i}
		if i == 2 {
			fi.Key = []string{"A"}
		}
		d.Forms[1].Items = append(d.Forms[1].Items, fi)
	}
	for c := range d.Candidates() {
		for i, code := range d.Answers.Row(c) {
			if code == CodeNotPresented || code == CodeTechnical {
				d.Answers.Row(c)[i] = 0
			}
		}
		if c%3 == 0 {
			d.Answers.Row(c)[2] = []byte{CodeOmitted, CodeInvalid, CodeNotReached}[c/3%3]
		}
	}
	e := mustRun(t, openPlan("g", "a", "b", PurifyNone), d)
	sets := e.Comparisons[0].Matching.Sets
	if len(sets) != 2 || sets[0].Items+sets[1].Items != 2*len(d.Items)-1 {
		t.Fatalf("sets %+v, want one with and one without the item", sets)
	}
	n := 0
	for c := range d.Candidates() {
		if g := d.Groupings[0].Codes[c]; d.FormOf[c] == 1 && (g == 1 || g == 2) && d.Answers.Row(c)[2] != CodeNotReached {
			n++
		}
	}
	if f := e.Comparisons[0].Items[2]; f.NReference+f.NFocal != n {
		t.Errorf("%d scored responses, want the %d of the form with a key", f.NReference+f.NFocal, n)
	}
}

// Candidates without the external score are counted by group, warned about and said first.
func TestMissingExternalScores(t *testing.T) {
	t.Parallel()
	d := mixedData(5, 2000, 9)
	lost := [2]int{}
	total := [2]int{}
	for c := range d.External {
		d.External[c] = float64(c % 7)
		g := d.Groupings[0].Codes[c]
		if g != 1 && g != 2 {
			continue
		}
		total[g-1]++
		if g == 2 && c%4 == 0 {
			d.External[c] = math.NaN()
			lost[1]++
		}
	}
	p := openPlan("g", "a", "b", PurifyTwoStage)
	p.Matching.Variable = MatchExternal
	e := mustRun(t, p, d)
	c := e.Comparisons[0]
	if c.Groups.Focal.NoScore != lost[1] || c.Groups.Reference.NoScore != 0 || c.Groups.Focal.N+lost[1] != total[1] {
		t.Errorf("groups %+v, want %d focal candidates without a score", c.Groups, lost[1])
	}
	if !hasWarning(c.Warnings, WarnCandidatesLost) || !hasWarning(c.Warnings, WarnFocalLost) {
		t.Errorf("warnings %v", c.Warnings)
	}
	said := e.LostCandidates()
	if len(said) != 1 || !(math.Abs(said[0].Focal-float64(lost[1])/float64(total[1])) < 1e-12) || said[0].Reference != 0 {
		t.Errorf("said %+v", said)
	}
	if len(c.Matching.Stages) != 1 {
		t.Errorf("%d stages, want one", len(c.Matching.Stages))
	}
	if r := c.Matching.ScoreCorrelation; r == nil || !(math.Abs(*r) < 0.2) {
		t.Errorf("correlation of an unrelated score: %v", r)
	}
	for c := range d.External { // the total itself, as far as it is whole
		sum := 0.0
		for i, code := range d.Answers.Row(c) {
			if d.Items[i].Options == nil && d.Items[i].Role != RolePretest && code <= MaxCode {
				sum += float64(code)
			}
		}
		d.External[c] = sum
	}
	if r := mustRun(t, p, d).Comparisons[0].Matching.ScoreCorrelation; r == nil || *r < 0.7 {
		t.Errorf("correlation of the score with itself, in the main: %v", r)
	}
}

// An item with no points to win has no variation; it is not an item without a key.
func TestItemWithMaximumZero(t *testing.T) {
	t.Parallel()
	d := verbalBinary(t)
	d.Items[3].MaxScore = 0
	for c := range d.Candidates() {
		d.Answers.Row(c)[3] = 0
	}
	e := mustRun(t, openPlan("gender", "F", "M", PurifyTwoStage), d)
	f := e.Comparisons[0].Items[3]
	if deref(f.Classification.Reason) != ReasonNoVariation || f.NReference != 243 || f.NFocal != 73 {
		t.Errorf("%+v with %d and %d", f.Classification, f.NReference, f.NFocal)
	}
	if said := e.Disagreements(); len(said) > 0 {
		t.Error(said)
	}
	if s := f.Standardization(); s == nil || value(s.PDif) != 0 || value(s.PDifSE) != 0 {
		t.Errorf("P-DIF of degenerate strata: %+v, want 0 with standard error 0", s)
	}
}

// A third group in the plan changes nothing about a comparison.
func TestComparisonsDoNotTouchEachOther(t *testing.T) {
	t.Parallel()
	d := mixedData(31, 1200, 10)
	for c := range d.Candidates() { // only the third group and the first were presented everything
		if d.Groupings[0].Codes[c] == 2 {
			d.Answers.Row(c)[0] = CodeNotPresented
		}
	}
	alone := mustRun(t, openPlan("g", "a", "b", PurifyTwoStage), d).Comparisons[0]
	p := openPlan("g", "a", "b", PurifyTwoStage)
	p.Comparisons = append(p.Comparisons, PlannedComparison{"g", "a", "c"}, PlannedComparison{"g", "c", "b"})
	beside := mustRun(t, p, d).Comparisons[0]
	if a, b := value(alone.Matching.Reliability), value(beside.Matching.Reliability); a != b && !(math.IsNaN(a) && math.IsNaN(b)) {
		t.Errorf("reliability %v alone, %v beside others", a, b)
	}
	if alone.Groups.Focal.Unmatched != beside.Groups.Focal.Unmatched {
		t.Errorf("unmatched %d alone, %d beside others", alone.Groups.Focal.Unmatched, beside.Groups.Focal.Unmatched)
	}
	for i := range alone.Items {
		x, y := alone.Items[i], beside.Items[i]
		for k := range x.Strata {
			x.Strata[k].Set, y.Strata[k].Set = 0, 0 // sets are numbered over all groups of the grouping
		}
		a, errA := plainJSON(x)
		b, errB := plainJSON(y)
		if errA != nil || errB != nil || string(a) != string(b) {
			t.Errorf("%s differs beside other comparisons:\n%s\n%s", x.Item, a, b)
		}
	}
}
