package simulate_test

import (
	"crypto/sha256"
	"fmt"
	"math"
	"slices"
	"testing"

	"github.com/google/go-cmp/cmp"

	"difaudit/dif"
	"difaudit/dif/simulate"
)

// Monte-Carlo checks allow this many standard errors. The seeds are fixed, so that a
// check passes always or never; under a right model one in 30,000 would fail.
const errorsAllowed = 4.2

func design(model simulate.Model, nR, nF, items int) simulate.Design {
	return simulate.Design{
		Model: model, Seed: 1, Groupings: []string{"group"},
		Groups: []simulate.Group{
			{Labels: []string{"reference"}, N: nR, SD: 1},
			{Labels: []string{"focal"}, N: nF, Mean: -0.5, SD: 1},
		},
		Items: simulate.NewItems(items),
	}
}

func simulation(t testing.TB, d simulate.Design) *simulate.Simulation {
	t.Helper()
	s, err := simulate.New(d)
	if err != nil {
		t.Fatal(err)
	}
	return s
}

func parameters(a, b, c float64) *simulate.Parameters {
	return &simulate.Parameters{A: a, B: simulate.Thresholds{b}, C: c}
}

// checkShare compares an observed proportion with the exact probability of the event
// over n independent tries.
func checkShare(t *testing.T, what string, hits, n int, p float64) {
	t.Helper()
	se := math.Sqrt(p * (1 - p) / float64(n))
	if got := float64(hits) / float64(n); !(math.Abs(got-p) <= errorsAllowed*se) {
		t.Errorf("%s: share %.5f of %d, want %.5f within %.5f", what, got, n, p, errorsAllowed*se)
	}
}

// At a fixed ability the proportion correct is binomial with the closed form of the
// Rasch model, 1/(1+exp(-(θ-b))).
func TestProportionCorrectAtFixedAbility(t *testing.T) {
	t.Parallel()
	difficulty := []float64{-2, -0.3, 0, 1, 2.5}
	d := design(simulate.Rasch, 100_000, 100_000, 0)
	d.Groups[0].Mean, d.Groups[0].SD = 0.4, 0
	d.Groups[1].Mean, d.Groups[1].SD = -1, 0
	for _, b := range difficulty {
		d.Items = append(d.Items, simulate.Item{Parameters: parameters(1, b, 0)})
	}
	correct := make([][2]int, len(difficulty))
	for c := range simulation(t, d).Candidates() {
		for i, a := range c.Answers {
			correct[i][c.Group] += int(a)
		}
	}
	for i, b := range difficulty {
		for g, theta := range []float64{0.4, -1} {
			checkShare(t, fmt.Sprintf("b %v, θ %v", b, theta), correct[i][g], 100_000, 1/(1+math.Exp(b-theta)))
		}
	}
}

// Probabilities of answer patterns under the 2PL and N(0,1), computed by numerical
// integration outside this project: CV-46 of the methods specification. They check
// abilities, curves and the independence of items given ability together.
func TestPatternProbabilities(t *testing.T) {
	t.Parallel()
	a := []float64{1, 1.2, 0.8, 1.5, 0.9}
	intercept := []float64{1.5, 0.5, -0.2, 0, -1}
	want := map[[5]byte]float64{
		{0, 0, 0, 0, 0}: 0.06309775,
		{1, 1, 1, 1, 1}: 0.08957279,
		{1, 1, 0, 0, 0}: 0.07542670,
	}
	const n = 200_000
	d := design(simulate.TwoPL, n, 1, 0)
	for i := range a {
		d.Items = append(d.Items, simulate.Item{Parameters: parameters(a[i], -intercept[i]/a[i], 0)})
	}
	seen := map[[5]byte]int{}
	for c := range simulation(t, d).Candidates() {
		if c.Group == 0 {
			seen[[5]byte(c.Answers)]++
		}
	}
	for pattern, p := range want {
		checkShare(t, fmt.Sprint(pattern), seen[pattern], n, p)
	}
}

// The log odds ratio in the answers at a fixed ability is Delta/2.35, with the
// variance of a log odds ratio, 1/a + 1/b + 1/c + 1/d (Woolf 1955, from memory).
func TestPlantedDIFInAnswers(t *testing.T) {
	t.Parallel()
	planted := []float64{-2, -1, 0, 1.5}
	d := design(simulate.Rasch, 60_000, 40_000, len(planted))
	for g := range d.Groups {
		d.Groups[g].Mean, d.Groups[g].SD = 0.3, 0
	}
	for i, delta := range planted {
		d.Items[i].DIF = []simulate.Shift{{Group: 1, Delta: delta}}
	}
	var counts [4][2][2]float64 // item, group, answer
	for c := range simulation(t, d).Candidates() {
		for i, a := range c.Answers {
			counts[i][c.Group][a]++
		}
	}
	for i, want := range planted {
		n := counts[i]
		logOdds := math.Log(n[0][1] * n[1][0] / (n[0][0] * n[1][1]))
		se := math.Sqrt(1/n[0][0] + 1/n[0][1] + 1/n[1][0] + 1/n[1][1])
		if got := -2.35 * logOdds; !(math.Abs(got-want) <= errorsAllowed*2.35*se) {
			t.Errorf("item %d: D-DIF %.3f (SE %.3f), want %.1f", i+1, got, 2.35*se, want)
		}
	}
}

// The moments of a normal sample: the mean has variance σ²/n, the variance about
// 2σ⁴/n.
func TestAbilities(t *testing.T) {
	t.Parallel()
	d := design(simulate.Rasch, 40_000, 30_000, 1)
	d.Groups[1].Mean, d.Groups[1].SD = -0.7, 1.4
	s := simulation(t, d)
	var sum, squares [2]float64
	for c := range s.Candidates() {
		sum[c.Group] += c.Ability
		squares[c.Group] += c.Ability * c.Ability
	}
	for g, group := range d.Groups {
		n := float64(group.N)
		mean := sum[g] / n
		variance := squares[g]/n - mean*mean
		if !(math.Abs(mean-group.Mean) <= errorsAllowed*group.SD/math.Sqrt(n)) {
			t.Errorf("group %d: mean %.4f, want %v", g, mean, group.Mean)
		}
		v := group.SD * group.SD
		if !(math.Abs(variance-v) <= errorsAllowed*v*math.Sqrt(2/n)) {
			t.Errorf("group %d: variance %.4f, want %v", g, variance, v)
		}
		told := s.Truth().Groups[g]
		if !(math.Abs(told.SampleMean-mean) <= 1e-9) || told.SampleSD == nil ||
			!(math.Abs(*told.SampleSD-math.Sqrt(variance*n/(n-1))) <= 1e-9) {
			t.Errorf("group %d: the truth has mean %v, SD %v; the abilities have %v, %v", g, told.SampleMean, told.SampleSD, mean, math.Sqrt(variance))
		}
	}
}

// Streams that start next to each other must not resemble each other: answers with
// probability 1/2 of candidates one and two apart agree half the time, and so do
// those of neighbouring seeds.
func TestStreamsAreIndependent(t *testing.T) {
	t.Parallel()
	const n = 100_000
	d := design(simulate.Rasch, n, 1, 0)
	d.Groups[0].SD = 0
	d.Items = []simulate.Item{{Parameters: parameters(1, 0, 0)}, {Parameters: parameters(1, 0, 0)}}
	answers := func(seed int64) (a [2][]byte) {
		d.Seed = seed
		for c := range simulation(t, d).Candidates() {
			if c.Group == 0 {
				a[0], a[1] = append(a[0], c.Answers[0]), append(a[1], c.Answers[1])
			}
		}
		return a
	}
	agree := func(x, y []byte) (hits int) {
		for i := range x {
			if x[i] == y[i] {
				hits++
			}
		}
		return hits
	}
	one, two := answers(1), answers(2)
	checkShare(t, "one apart", agree(one[0][1:], one[0][:n-1]), n-1, 0.5)
	checkShare(t, "two apart", agree(one[0][2:], one[0][:n-2]), n-2, 0.5)
	checkShare(t, "two items", agree(one[0], one[1]), n, 0.5)
	checkShare(t, "two seeds", agree(one[0], two[0]), n, 0.5)
}

// digest is the SHA-256 of all that a simulation gives.
func digest(s *simulate.Simulation) string {
	h := sha256.New()
	for c := range s.Candidates() {
		fmt.Fprintf(h, "%s %d %v %v %v\n", c.ID, c.Group, c.Ability, c.External, c.Answers)
	}
	return fmt.Sprintf("%x", h.Sum(nil))
}

func TestSameSeedSameAnswers(t *testing.T) {
	t.Parallel()
	d := design(simulate.ThreePL, 300, 200, 15)
	d.Options, d.OmittedShare, d.NotReachedShare, d.ExternalCorrelation = 4, 0.05, 0.04, 0.9
	s := simulation(t, d)
	first := digest(s)
	if digest(s) != first {
		t.Error("a second walk over the same simulation gives other answers")
	}
	if digest(simulation(t, d)) != first {
		t.Error("the same design gives other answers")
	}
	d.Seed = 2
	if digest(simulation(t, d)) == first {
		t.Error("another seed gives the same answers")
	}
}

// More candidates, or one more item at the end, leave what was there as it was.
func TestStreamsStandApart(t *testing.T) {
	t.Parallel()
	d := design(simulate.TwoPL, 200, 100, 12)
	d.Options = 5
	small := simulation(t, d)
	rows := func(s *simulate.Simulation, group, items int) (rows [][]byte) {
		for c := range s.Candidates() {
			if c.Group == group && len(rows) < 100 {
				rows = append(rows, slices.Clone(c.Answers[:items]))
			}
		}
		return rows
	}
	d.Groups[0].N = 5_000
	d.Groups[1].N = 150
	d.Items = simulate.NewItems(13)
	large := simulation(t, d)
	for g := range 2 {
		if diff := cmp.Diff(rows(small, g, 12), rows(large, g, 12)); diff != "" {
			t.Errorf("answers of group %d changed with the number of candidates:\n%s", g, diff)
		}
	}
	for i, item := range small.Truth().Items {
		got := large.Truth().Items[i]
		if *got.Key != *item.Key || !slices.Equal(got.Shares, item.Shares) || !cmp.Equal(got.Groups[0].Parameters, item.Groups[0].Parameters) {
			t.Errorf("item %d changed with the number of candidates: %+v, was %+v", i+1, got, item)
		}
	}
	d.Model = simulate.Rasch
	for i, item := range simulation(t, d).Truth().Items {
		if got, want := item.Groups[0].B[0], large.Truth().Items[i].Groups[0].B[0]; got != want {
			t.Errorf("item %d: difficulty %v under Rasch, %v under 2PL", i+1, got, want)
		}
	}
}

func TestIdentifiers(t *testing.T) {
	t.Parallel()
	var ids []string
	for c := range simulation(t, design(simulate.Rasch, 9, 3, 1)).Candidates() {
		ids = append(ids, string(c.ID))
	}
	if len(ids) != 12 || ids[0] != "C0000001" || ids[11] != "C0000012" {
		t.Errorf("identifiers %v, want C0000001 to C0000012", ids)
	}
}

func TestStopsWhenAsked(t *testing.T) {
	t.Parallel()
	n := 0
	for range simulation(t, design(simulate.Rasch, 50, 50, 3)).Candidates() {
		if n++; n == 7 {
			break
		}
	}
	if n != 7 {
		t.Errorf("%d candidates after a stop at 7", n)
	}
}

func TestBlankCodesAreThoseOfData(t *testing.T) {
	t.Parallel()
	if simulate.Omitted != dif.CodeOmitted || simulate.NotReached != dif.CodeNotReached {
		t.Error("the codes of blank answers differ from those of dif.Data")
	}
}

// The external score has the stated correlation with ability where ability is
// N(0,1); the standard error of r is (1-ρ²)/√n. Rounding to whole numbers adds a
// variance of 1/12 to 100.
func TestExternalScore(t *testing.T) {
	t.Parallel()
	const n, rho = 50_000, 0.8
	d := design(simulate.Rasch, n, 1, 1)
	d.ExternalCorrelation = rho
	var sx, sy, sxx, syy, sxy float64
	for c := range simulation(t, d).Candidates() {
		if c.Group == 0 {
			x, y := c.Ability, c.External-50
			if y != math.Round(y) {
				t.Fatalf("external score %v is no whole number", c.External)
			}
			sx, sy, sxx, syy, sxy = sx+x, sy+y, sxx+x*x, syy+y*y, sxy+x*y
		}
	}
	r := (sxy - sx*sy/n) / math.Sqrt((sxx-sx*sx/n)*(syy-sy*sy/n))
	want := rho / math.Sqrt(1+1/1200.0)
	if !(math.Abs(r-want) <= errorsAllowed*(1-rho*rho)/math.Sqrt(n)) {
		t.Errorf("correlation %.4f, want %.4f", r, want)
	}
	if sd := math.Sqrt(syy/n - sy*sy/n/n); !(math.Abs(sd-10) <= 0.2) {
		t.Errorf("standard deviation %.3f, want 10", sd)
	}
}

func BenchmarkCandidates(b *testing.B) {
	for _, options := range []int{0, 4} {
		b.Run(fmt.Sprintf("10000x100/options%d", options), func(b *testing.B) {
			d := design(simulate.TwoPL, 7_000, 3_000, 100)
			d.Options = options
			s := simulation(b, d)
			for b.Loop() {
				for range s.Candidates() {
				}
			}
		})
	}
}
