package simulate

import "math/rand/v2"

// purpose names a stream of random numbers.
type purpose uint64

const (
	forItem     purpose = iota + 1 // parameters of an item
	forChoices                     // key of an item and what draws candidates to its wrong options
	forAbility                     // ability of a candidate
	forAnswers                     // right or wrong, item by item
	forOptions                     // option chosen, for each wrong answer
	forBlanks                      // where the candidate stops, then omissions
	forExternal                    // external score
)

// stream is a source of random numbers that can be set to the start of any of its
// streams. It is the PCG generator of the standard library (O'Neill 2014).
type stream struct {
	seed uint64
	pcg  rand.PCG
	rand *rand.Rand // reads pcg
}

func newStream(seed int64) *stream {
	s := &stream{seed: uint64(seed)}
	s.rand = rand.New(&s.pcg)
	return s
}

// start moves to the beginning of one stream: that of an item (group 0) or of a
// candidate, by index within the group. The generator itself turns the name of the
// stream into its initial state: from neighbouring states a linear generator would
// move through states in a fixed relation.
func (s *stream) start(p purpose, group, index int) {
	s.pcg.Seed(s.seed, uint64(p)<<56|uint64(group)<<40|uint64(index))
	high := s.pcg.Uint64()
	low := s.pcg.Uint64()
	s.pcg.Seed(high, low)
}

// uniform returns a number from 0 to below 1 with 53 random bits.
func (s *stream) uniform() float64 { return float64(s.pcg.Uint64()>>11) / (1 << 53) }

// normal returns a standard normal number.
func (s *stream) normal() float64 { return s.rand.NormFloat64() }
