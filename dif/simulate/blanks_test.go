package simulate_test

import (
	"math"
	"slices"
	"testing"

	"difaudit/dif/simulate"
)

// Blanks have the stated shares, stand where their kind says, and cover answers of
// the same seed without blanks: omissions only wrong ones, so that a blank counted as
// wrong leaves the model as it is.
func TestBlanks(t *testing.T) {
	t.Parallel()
	for _, tt := range []struct {
		omitted, notReached float64
		items, options      int
	}{
		{0.04, 0, 30, 0}, {0, 0.03, 30, 0}, {0.05, 0.02, 30, 4}, {0.1, 0.25, 12, 0}, {0, 0.25, 2, 0}, {0.1, 0.25, 3, 0},
	} {
		d := design(simulate.TwoPL, 12_000, 8_000, tt.items)
		d.Options = tt.options
		var full [][]byte
		whole := simulation(t, d)
		for c := range whole.Candidates() {
			full = append(full, slices.Clone(c.Answers))
		}
		d.OmittedShare, d.NotReachedShare = tt.omitted, tt.notReached
		s := simulation(t, d)
		truth := s.Truth()
		var omitted, notReached []float64 // per candidate
		row := 0
		for c := range s.Candidates() {
			end := len(c.Answers)
			for end > 0 && c.Answers[end-1] == simulate.NotReached {
				end--
			}
			if end == 0 || c.Answers[end-1] == simulate.Omitted {
				t.Fatalf("candidate %d: no answer before the items not reached: %v", row+1, c.Answers)
			}
			missed := 0
			for i, a := range c.Answers[:end] {
				was := full[row][i]
				right := was == 1
				if tt.options > 0 {
					right = was == (*truth.Items[i].Key)[0]-'A'
				}
				switch {
				case a == simulate.NotReached:
					t.Fatalf("candidate %d: item %d not reached before an answer", row+1, i+1)
				case a == simulate.Omitted && right:
					t.Fatalf("candidate %d: item %d omitted though known", row+1, i+1)
				case a == simulate.Omitted:
					missed++
				case a != was:
					t.Fatalf("candidate %d: item %d answered %d, without blanks %d", row+1, i+1, a, was)
				}
			}
			omitted = append(omitted, float64(missed)-tt.omitted*float64(end))
			notReached = append(notReached, float64(len(c.Answers)-end)-tt.notReached*float64(tt.items))
			row++
		}
		// Both differences have expectation 0; candidates are independent.
		checkMeanZero(t, "omitted", omitted)
		checkMeanZero(t, "not reached", notReached)
		if s.HasBlanks() == false || whole.HasBlanks() {
			t.Errorf("%+v: blanks told wrongly", tt)
		}
	}
}

func checkMeanZero(t *testing.T, what string, x []float64) {
	t.Helper()
	var sum, squares float64
	for _, v := range x {
		sum += v
		squares += v * v
	}
	n := float64(len(x))
	mean := sum / n
	se := math.Sqrt((squares/n - mean*mean) / n)
	if !(math.Abs(mean) <= errorsAllowed*se+1e-12) {
		t.Errorf("%s: mean %.5f blanks off the stated share, standard error %.5f", what, mean, se)
	}
}
