package reports

import (
	"math"
	"testing"

	"difaudit/dif"
)

// Levels and their joining worked out by hand; the two sets at score 5 stay together.
func TestMergeLevels(t *testing.T) {
	t.Parallel()
	strata := []dif.StratumSummary{
		{Score: 5, NReference: 12, MeanReference: 0.75, NFocal: 11, MeanFocal: 3.0 / 11},
		{Score: 1, NReference: 3, MeanReference: 0, NFocal: 10, MeanFocal: 0.1},
		{Score: 2, NReference: 7, MeanReference: 3.0 / 7, NFocal: 2, MeanFocal: 0.5},
		{Score: 5, NReference: 8, MeanReference: 0.5, NFocal: 7, MeanFocal: 3.0 / 7, Set: 2},
		{Score: 6, NReference: 2, MeanReference: 1, NFocal: 3, MeanFocal: 1},
	}
	got := mergeLevels(strata, 1, 14)
	if len(got) != 2 {
		t.Fatalf("%d points, want 2", len(got))
	}
	for i, want := range []curvePoint{
		{nReference: 10, nFocal: 12, score: (13*1.0 + 9*2) / 22, shareReference: 3.0 / 10, shareFocal: 2.0 / 12},
		{nReference: 22, nFocal: 21, score: (38*5.0 + 5*6) / 43, shareReference: (9 + 4 + 2) / 22.0, shareFocal: (3 + 3 + 3) / 21.0},
	} {
		p := got[i]
		if p.nReference != want.nReference || p.nFocal != want.nFocal {
			t.Errorf("point %d: %d and %d candidates, want %d and %d", i, p.nReference, p.nFocal, want.nReference, want.nFocal)
		}
		for _, v := range [][2]float64{{p.score, want.score}, {p.shareReference, want.shareReference}, {p.shareFocal, want.shareFocal}} {
			if !(math.Abs(v[0]-v[1]) <= 1e-12) {
				t.Errorf("point %d: %v, want %v", i, v[0], v[1])
			}
		}
	}
}

func TestMergeLevelsNeedsTenOfEachGroup(t *testing.T) {
	t.Parallel()
	if got := mergeLevels([]dif.StratumSummary{{Score: 1, NReference: 500, NFocal: 9}}, 1, 14); got != nil {
		t.Errorf("got %v, want no picture", got)
	}
	if got := mergeLevels(nil, 1, 14); got != nil {
		t.Errorf("got %v, want no picture", got)
	}
}

func TestMergeLevelsLimitsThePointsAndLosesNobody(t *testing.T) {
	t.Parallel()
	var strata []dif.StratumSummary
	reference, focal := 0, 0
	for s := range 60 {
		n := 20 + (s*7)%31
		strata = append(strata, dif.StratumSummary{Score: float64(s), NReference: 2 * n, MeanReference: 0.5, NFocal: n, MeanFocal: 0.25})
		reference, focal = reference+2*n, focal+n
	}
	got := mergeLevels(strata, 1, 14)
	if len(got) != 14 {
		t.Fatalf("%d points, want 14", len(got))
	}
	for i, p := range got {
		reference, focal = reference-p.nReference, focal-p.nFocal
		if i > 0 && got[i-1].score >= p.score {
			t.Errorf("points %d and %d are out of order", i-1, i)
		}
		if !(math.Abs(p.shareReference-0.5) <= 1e-12 && math.Abs(p.shareFocal-0.25) <= 1e-12) {
			t.Errorf("point %d: %v and %v", i, p.shareReference, p.shareFocal)
		}
	}
	if reference != 0 || focal != 0 {
		t.Errorf("%d and %d candidates are lost", reference, focal)
	}
}

func TestSpreadKeepsOrderAndDistance(t *testing.T) {
	t.Parallel()
	got := spread([]float64{1, 1.2, 1.3, 9.9, 10}, 1, 0, 10)
	for i, v := range got {
		if v < 0 || v > 10 || i > 0 && !(v-got[i-1] >= 1-1e-9) {
			t.Fatalf("spread to %v", got)
		}
	}
}

// Labels of an axis are short decimals, also where steps of a tenth add up badly.
func TestTicksAreShortNumbers(t *testing.T) {
	t.Parallel()
	for _, s := range []scale{{12.45, 13.35, 0, 1}, {0.1, 0.7, 0, 1}, {0, 1, 0, 1}, {-3, 250, 0, 1}, {1.001, 1.009, 0, 1}} {
		for _, v := range s.ticks(10) {
			if text := shortest(&v); len(text) > 5 || v < s.low-1e-9 || v > s.high+1e-9 {
				t.Errorf("tick %s between %v and %v", text, s.low, s.high)
			}
		}
	}
}
