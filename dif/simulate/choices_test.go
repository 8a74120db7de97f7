package simulate_test

import (
	"math"
	"slices"
	"testing"

	"difaudit/dif/simulate"
)

// Choices scored by their key are the scores of the same seed without choices.
func TestChoicesScoreAsScores(t *testing.T) {
	t.Parallel()
	d := design(simulate.TwoPL, 400, 300, 20)
	var scored [][]byte
	for c := range simulation(t, d).Candidates() {
		scored = append(scored, slices.Clone(c.Answers))
	}
	d.Options = 5
	s := simulation(t, d)
	truth := s.Truth()
	n := 0
	for c := range s.Candidates() {
		for i, a := range c.Answers {
			right := (*truth.Items[i].Key)[0] == 'A'+a
			if right != (scored[n][i] == 1) {
				t.Fatalf("candidate %d, item %d: choice %d with key %s, score %d", n+1, i+1, a, *truth.Items[i].Key, scored[n][i])
			}
		}
		n++
	}
}

// Wrong options are chosen with the shares the truth gives, which are uneven.
func TestWrongOptionsAreUneven(t *testing.T) {
	t.Parallel()
	d := design(simulate.Rasch, 30_000, 10_000, 6)
	d.Options = 4
	d.Items[2].Key = "C"
	s := simulation(t, d)
	counts := make([][4]int, 6)
	for c := range s.Candidates() {
		for i, a := range c.Answers {
			counts[i][a]++
		}
	}
	for i, item := range s.Truth().Items {
		key := int((*item.Key)[0] - 'A')
		if i == 2 && key != 2 {
			t.Errorf("item 3 has key %s, want the stated C", *item.Key)
		}
		wrong, sum := 0, 0.0
		for o, k := range counts[i] {
			if o != key {
				wrong += k
			}
		}
		for o, share := range item.Shares {
			sum += share
			if o == key {
				if share != 0 {
					t.Errorf("item %d: the key has a share of %v among wrong answers", i+1, share)
				}
				continue
			}
			checkShare(t, item.ID, counts[i][o], wrong, share)
		}
		if !(math.Abs(sum-1) <= 1e-12) {
			t.Errorf("item %d: shares sum to %v", i+1, sum)
		}
		if slices.Max(item.Shares) < 0.35 {
			t.Errorf("item %d: wrong options are nearly even: %v", i+1, item.Shares)
		}
	}
}
