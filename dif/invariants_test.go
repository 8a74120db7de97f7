package dif

import (
	"encoding/json"
	"math"
	"math/rand/v2"
	"slices"
	"strings"
	"testing"
)

// The properties of this file follow from the formulas and hold for every table.

// randomTable returns a table with empty, one-group, degenerate and ordinary strata.
func randomTable(r *rand.Rand) *ItemTable {
	t := &ItemTable{Categories: 2}
	for k := range 1 + r.IntN(12) {
		t.Strata = append(t.Strata, Stratum{Score: float64(k)})
		top := 1 + r.IntN(30)
		for range 4 {
			n := r.IntN(top)
			if r.IntN(5) == 0 {
				n = 0
			}
			t.Counts = append(t.Counts, uint32(n))
		}
	}
	return t
}

// mapped returns a table whose strata are changed one by one.
func (t *ItemTable) mapped(change func(c []uint32)) *ItemTable {
	out := &ItemTable{Categories: t.Categories, Strata: slices.Clone(t.Strata), Counts: slices.Clone(t.Counts)}
	for k := range out.Strata {
		change(out.Counts[4*k : 4*k+4])
	}
	return out
}

// outcome is every number of the three methods.
type outcome struct {
	mh  *MantelHaenszelResult
	bd  *BreslowDayResult
	std *StandardizationResult
}

func testAll(t *ItemTable) outcome {
	c := DefaultPlan().Criteria
	return outcome{
		mantelHaenszel{}.Test(t, c).(*MantelHaenszelResult), breslowDay{}.Test(t, c).(*BreslowDayResult), standardization{}.Test(t, c).(*StandardizationResult),
	}
}

// same fails unless both numbers are absent, or both present and near each other.
func same(t *testing.T, what string, a, b *float64, sign float64) {
	t.Helper()
	if (a == nil) != (b == nil) {
		t.Errorf("%s: %v against %v", what, a, b)
		return
	}
	if a != nil && !(math.Abs(*a-sign**b) <= 1e-9*math.Max(1, math.Abs(*a))) {
		t.Errorf("%s: %v against %v", what, *a, sign**b)
	}
}

func (x outcome) sameTests(t *testing.T, what string, y outcome) {
	t.Helper()
	same(t, what+" chi-square", x.mh.ChiSquare, y.mh.ChiSquare, 1)
	same(t, what+" corrected", x.mh.ChiSquareCorrected, y.mh.ChiSquareCorrected, 1)
	same(t, what+" exact", x.mh.ExactPValue, y.mh.ExactPValue, 1)
	same(t, what+" SE", x.mh.DeltaSE, y.mh.DeltaSE, 1)
	same(t, what+" Breslow-Day", x.bd.Statistic, y.bd.Statistic, 1)
	same(t, what+" Tarone", x.bd.Tarone, y.bd.Tarone, 1)
	same(t, what+" trend", x.bd.Trend.Statistic, y.bd.Trend.Statistic, 1)
}

func TestInvariants(t *testing.T) {
	t.Parallel()
	r := rand.New(rand.NewPCG(1, 2))
	finite := 0
	for range 3000 {
		table := randomTable(r)
		x := testAll(table)
		if x.mh.Delta != nil {
			finite++
		}

		swapped := testAll(table.mapped(func(c []uint32) { c[0], c[1], c[2], c[3] = c[2], c[3], c[0], c[1] }))
		x.sameTests(t, "groups swapped", swapped)
		same(t, "groups swapped delta", x.mh.Delta, swapped.mh.Delta, -1)
		same(t, "groups swapped log odds ratio", x.mh.LogOddsRatio, swapped.mh.LogOddsRatio, -1)

		flipped := testAll(table.mapped(func(c []uint32) { c[0], c[1], c[2], c[3] = c[1], c[0], c[3], c[2] }))
		x.sameTests(t, "right and wrong swapped", flipped)
		same(t, "right and wrong swapped delta", x.mh.Delta, flipped.mh.Delta, -1)
		same(t, "right and wrong swapped P-DIF", x.std.PDif, flipped.std.PDif, -1)

		doubled := testAll(table.mapped(func(c []uint32) {
			for i := range c {
				c[i] *= 2
			}
		}))
		same(t, "everybody twice odds ratio", x.mh.OddsRatio, doubled.mh.OddsRatio, 1)
		same(t, "everybody twice P-DIF", x.std.PDif, doubled.std.PDif, 1)
		same(t, "everybody twice SE", x.mh.DeltaSE, doubled.mh.DeltaSE, math.Sqrt2)

		more := &ItemTable{Categories: 2, Strata: slices.Clone(table.Strata), Counts: slices.Clone(table.Counts)}
		more.Strata = append(more.Strata, Stratum{Score: 90}, Stratum{Score: 91}, Stratum{Score: 92})
		more.Counts = append(more.Counts, 0, 0, 0, 0, 3, 4, 0, 0, 0, 0, 2, 9)
		y := testAll(more)
		x.sameTests(t, "empty and one-group strata", y)
		same(t, "empty and one-group strata P-DIF", x.std.PDif, y.std.PDif, 1)
		same(t, "empty and one-group strata P-DIF SE", x.std.PDifSE, y.std.PDifSE, 1)

		order := r.Perm(len(table.Strata))
		mixed := &ItemTable{Categories: 2}
		for _, k := range order {
			mixed.Strata = append(mixed.Strata, Stratum{Score: table.Strata[k].Score + 1000}) // and a constant added to the score
			mixed.Counts = append(mixed.Counts, table.Counts[4*k:4*k+4]...)
		}
		y = testAll(mixed)
		x.sameTests(t, "strata reordered", y)
		same(t, "strata reordered delta", x.mh.Delta, y.mh.Delta, 1)

		// Phillips & Holland (1987) wrote the variance in another form.
		m := sumStrata(table)
		if m.r > 0 && m.s > 0 {
			alpha, sum := m.r/m.s, 0.0
			for k := range table.Strata {
				c := table.table2x2(k)
				if n := c.total(); c.comparable() {
					sum += (c.a*c.d + alpha*c.b*c.c) * (c.a + c.d + alpha*(c.b+c.c)) / (n * n)
				}
			}
			_, se := m.logOddsRatio()
			near(t, "Phillips-Holland variance", sum/(2*m.r*m.r), se*se, 1e-9)
		}
		if x.mh.ChiSquare != nil && (*x.mh.ChiSquareCorrected > *x.mh.ChiSquare || *x.mh.PValueCorrected < *x.mh.PValue) {
			t.Errorf("the correction makes the test larger: %v", table)
		}
	}
	if finite < 1000 {
		t.Errorf("only %d tables had a finite D-DIF", finite)
	}
}

// Two reorderings of the same people give the same findings.
func TestOrderOfItemsDoesNotMatter(t *testing.T) {
	t.Parallel()
	d := verbalBinary(t)
	p := openPlan("gender", "F", "M", PurifyTwoStage)
	want := mustRun(t, p, d).Comparisons[0].Items
	order := rand.New(rand.NewPCG(5, 5)).Perm(len(d.Items))
	mixed := *d
	mixed.Items, mixed.Answers = nil, NewAnswers(len(d.Items))
	for _, i := range order {
		mixed.Items = append(mixed.Items, d.Items[i])
	}
	for c := range d.Candidates() {
		row := mixed.Answers.Append()
		for at, i := range order {
			row[at] = d.Answers.Row(c)[i]
		}
	}
	got := mustRun(t, p, &mixed).Comparisons[0].Items
	for at, i := range order {
		a, err := json.Marshal(want[i])
		if err != nil {
			t.Fatal(err)
		}
		b, err := json.Marshal(got[at])
		if err != nil {
			t.Fatal(err)
		}
		if string(a) != string(b) {
			t.Errorf("%s: the finding depends on the order of the items", want[i].Item)
		}
	}
}

// FuzzStatistics: whatever the counts, every number is finite or absent, and swapping the
// groups mirrors the outcome.
func FuzzStatistics(f *testing.F) {
	f.Add([]byte{})
	f.Add([]byte{1, 0, 0, 0})
	f.Add([]byte{5, 5, 0, 6, 10, 0, 5, 0, 2, 8, 4, 4, 0, 3, 0, 0})
	f.Add([]byte{255, 1, 255, 1, 0, 0, 0, 0, 1, 255, 1, 255})
	f.Add([]byte{0, 255, 255, 0, 255, 0, 0, 255})
	f.Fuzz(func(t *testing.T, b []byte) {
		if len(b) > 400 {
			return
		}
		table := &ItemTable{Categories: 2}
		for k := 0; 4*k+4 <= len(b); k++ {
			table.Strata = append(table.Strata, Stratum{Score: float64(k)})
			for _, n := range b[4*k : 4*k+4] {
				c := uint32(n)
				if n > 250 {
					c = 1 << (n % 30) // large counts
				}
				table.Counts = append(table.Counts, c)
			}
		}
		for _, m := range Methods() {
			j, err := json.Marshal(m.Test(table, DefaultPlan().Criteria))
			if err != nil || strings.Contains(string(j), "NaN") {
				t.Fatalf("%s: %s %v", m.ID(), j, err)
			}
		}
		x := mantelHaenszel{}.Test(table, DefaultPlan().Criteria).(*MantelHaenszelResult)
		y := mantelHaenszel{}.Test(table.mapped(func(c []uint32) { c[0], c[1], c[2], c[3] = c[2], c[3], c[0], c[1] }), DefaultPlan().Criteria).(*MantelHaenszelResult)
		same(t, "delta", x.Delta, y.Delta, -1)
		same(t, "chi-square", x.ChiSquare, y.ChiSquare, 1)
		if x.ChiSquare != nil && *x.ChiSquare < 0 {
			t.Fatalf("chi-square %v", *x.ChiSquare)
		}
		var f Finding
		cover := table.cover()
		f.classify(2, &cover, Criteria{ClassAlpha: 0.05})
		if f.Classification.Class == nil && f.Classification.Reason == nil {
			t.Fatal("neither a class nor a reason")
		}
	})
}

// The expected cell gives back the odds ratio it was made for, also where the plain
// formula of the root would cancel.
func TestExpectedCellHasTheOddsRatio(t *testing.T) {
	t.Parallel()
	r := rand.New(rand.NewPCG(3, 4))
	negative := 0
	for range 20000 {
		x := cells{a: float64(r.IntN(5000)), b: float64(r.IntN(5000)), c: float64(r.IntN(5000)), d: float64(r.IntN(5000))}
		if !x.informative() {
			continue
		}
		alpha := math.Exp(12 * (r.Float64() - 0.5))
		if x.focal()-x.right()+alpha*(x.reference()+x.right()) < 0 {
			negative++
		}
		a := expectedCell(x, alpha)
		low, high := math.Max(0, x.right()-x.focal()), math.Min(x.reference(), x.right())
		if !(a > low && a < high) {
			t.Fatalf("%+v at %v: %v is not inside (%v, %v)", x, alpha, a, low, high)
		}
		// One more digit of the neighbours must not be asked for than they have.
		slack := 1e-15 * high * (1/a + 1/(x.reference()-a) + 1/(x.right()-a) + 1/(x.focal()-x.right()+a))
		got := a * (x.focal() - x.right() + a) / ((x.reference() - a) * (x.right() - a))
		if !(math.Abs(got/alpha-1) < 1e-12+4*slack) {
			t.Fatalf("%+v: cell %v has the odds ratio %v, want %v", x, a, got, alpha)
		}
	}
	if negative < 500 {
		t.Errorf("only %d cases where the formula would cancel", negative)
	}
}
