package simulate

import (
	"errors"
	"fmt"
	"math"
)

// maxNotReached is the largest expected share of answers not reached.
const maxNotReached = 0.25

// blanks says how answers come to be left blank. A candidate stops early with
// probability stop and then leaves the last 1 to longest items, each number equally
// likely. Of the wrong answers before the last one given, a share is omitted; the
// last one is always given, so that every omission has a later answer.
type blanks struct {
	stop    float64
	longest int
	omit    float64
}

// blankRule finds the rule that has the expected shares of the design. parameters
// holds those of each item in each group.
func (d Design) blankRule(parameters [][]Parameters) (blanks, error) {
	items := len(d.Items)
	var r blanks
	if d.NotReachedShare > 0 {
		// The expected number left is stop (longest + 1)/2. At most half of the candidates
		// stop early, and they do so in the last fifth where that is enough.
		left := d.NotReachedShare * float64(items)
		r.longest = max((items+4)/5, int(math.Ceil(4*left))-1)
		r.stop = 2 * left / float64(r.longest+1)
		if r.longest >= items {
			return blanks{}, errors.New("items that are not reached need at least two items: add one, or leave the share out")
		}
	}
	if d.OmittedShare > 0 {
		total := 0
		for _, g := range d.Groups {
			total += g.N
		}
		var reached, wrong float64 // expected per candidate; wrong: before the last answer given
		for i := range items {
			reached += r.reach(items, i)
			p := 0.0
			for g, group := range d.Groups {
				p += float64(group.N) / float64(total) * expectedCorrect(parameters[i][g], group)
			}
			wrong += r.reach(items, i+1) * (1 - p)
		}
		r.omit = d.OmittedShare * reached / wrong
		if !(r.omit <= 1) {
			return blanks{}, fmt.Errorf("omitted share %v: only wrong answers are omitted, and they allow at most %.3f", d.OmittedShare, wrong/reached)
		}
	}
	return r, nil
}

// reach is the probability that item i (from 0) of n is reached; 0 past the last.
func (r blanks) reach(n, i int) float64 {
	switch {
	case i >= n:
		return 0
	case r.longest == 0 || i < n-r.longest:
		return 1
	}
	// Not reached when the candidate leaves at least n - i items.
	return 1 - r.stop*float64(r.longest-(n-i)+1)/float64(r.longest)
}

// apply blanks the answers of one candidate; right tells which of them are correct.
func (r blanks) apply(s *stream, answers []byte, right []bool) {
	end := len(answers)
	// Both numbers are always drawn, so that omissions start at the same place of the
	// stream whether or not the candidate stops early.
	stops, left := s.uniform() < r.stop, 1+int(s.uniform()*float64(r.longest))
	if stops {
		end -= left
	}
	for i := end; i < len(answers); i++ {
		answers[i] = NotReached
	}
	if r.omit > 0 {
		for i := range end - 1 {
			if u := s.uniform(); !right[i] && u < r.omit {
				answers[i] = Omitted
			}
		}
	}
}
