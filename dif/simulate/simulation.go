package simulate

import (
	"fmt"
	"iter"
	"math"
	"strconv"
)

// Codes of blank answers among Candidate.Answers; they are those of dif.Data.
const (
	Omitted    = 0xFB // left blank with a later answer
	NotReached = 0xFC // left blank, and nothing later answered
)

// Simulation is a design with the parameters of its items. It does not change after
// New, and its methods may be used at the same time.
type Simulation struct {
	design     Design
	parameters [][]Parameters // by item, by group
	choices    []choices      // by item; nil for scored answers
	blanks     blanks
	idWidth    int
}

// Candidate is one simulated candidate.
type Candidate struct {
	ID       []byte  // C0000001 and so on
	Group    int     // index into Design.Groups
	Ability  float64 // on the metric of the item parameters
	External float64 // the external score; 0 without one
	Answers  []byte  // by item: score or index of the option chosen, Omitted or NotReached
}

// New checks the design and draws the item parameters and keys it leaves open. The
// error names everything that Validate finds, or a planted slope shift or a share of
// omitted answers that does not fit the drawn items.
func New(d Design) (*Simulation, error) {
	if err := d.Validate(); err != nil {
		return nil, fmt.Errorf("check design: %w", err)
	}
	s := &Simulation{design: d.complete()}
	random := newStream(d.Seed)
	for i := range d.Items {
		p, err := s.design.groupParameters(random, i)
		if err != nil {
			return nil, fmt.Errorf("plant DIF: %w", err)
		}
		s.parameters = append(s.parameters, p)
		if d.Options > 0 {
			s.choices = append(s.choices, s.design.drawChoices(random, i))
		}
	}
	var err error
	if s.blanks, err = s.design.blankRule(s.parameters); err != nil {
		return nil, fmt.Errorf("plan blank answers: %w", err)
	}
	s.idWidth = max(7, len(strconv.Itoa(s.Len())))
	return s, nil
}

// Design returns the design with the empty fields of its items filled in.
func (s *Simulation) Design() Design { return s.design }

// Len returns the number of candidates.
func (s *Simulation) Len() int {
	n := 0
	for _, g := range s.design.Groups {
		n += g.N
	}
	return n
}

// HasBlanks reports whether some answers may be blank.
func (s *Simulation) HasBlanks() bool { return s.blanks.stop > 0 || s.blanks.omit > 0 }

// Candidates gives the candidates group by group. The same Candidate is filled anew
// each time; copy what must outlive the step.
func (s *Simulation) Candidates() iter.Seq[*Candidate] {
	return func(yield func(*Candidate) bool) {
		random := newStream(s.design.Seed)
		c := &Candidate{Answers: make([]byte, len(s.design.Items))}
		right := make([]bool, len(s.design.Items))
		number := 0
		for g, group := range s.design.Groups {
			curves := s.curves(g)
			for k := range group.N {
				number++
				c.ID = s.appendID(c.ID[:0], number)
				c.Group = g
				c.Ability = s.ability(random, g, k)
				random.start(forAnswers, g, k)
				for i := range right {
					right[i] = random.uniform() < curves[i].correct(c.Ability)
				}
				s.answer(random, c, k, right)
				if !yield(c) {
					return
				}
			}
		}
	}
}

// answer fills in the answers and the external score of candidate k of a group.
func (s *Simulation) answer(random *stream, c *Candidate, k int, right []bool) {
	if s.choices == nil {
		for i, r := range right {
			c.Answers[i] = 0
			if r {
				c.Answers[i] = 1
			}
		}
	} else {
		random.start(forOptions, c.Group, k)
		for i, r := range right {
			if r {
				c.Answers[i] = byte(s.choices[i].key)
			} else {
				c.Answers[i] = byte(s.choices[i].wrong(random.uniform()))
			}
		}
	}
	if s.HasBlanks() {
		random.start(forBlanks, c.Group, k)
		s.blanks.apply(random, c.Answers, right)
	}
	if rho := s.design.ExternalCorrelation; rho > 0 {
		random.start(forExternal, c.Group, k)
		z := rho*c.Ability + math.Sqrt(1-rho*rho)*random.normal()
		c.External = math.Round(50 + 10*z)
	}
}

// ability returns that of candidate k of group g.
func (s *Simulation) ability(random *stream, g, k int) float64 {
	random.start(forAbility, g, k)
	group := &s.design.Groups[g]
	return group.Mean + group.SD*random.normal()
}

// appendID appends the identifier of the candidate with this number, from 1.
func (s *Simulation) appendID(id []byte, number int) []byte {
	id = append(id, 'C')
	from := len(id)
	for range s.idWidth {
		id = append(id, '0')
	}
	for i := len(id) - 1; i >= from; i-- {
		id[i] = byte('0' + number%10)
		number /= 10
	}
	return id
}

// curve is an item response function in slope and intercept, for the inner loop.
type curve struct{ slope, intercept, low, rise float64 }

func (c *curve) correct(theta float64) float64 {
	return c.low + c.rise/(1+math.Exp(-c.slope*theta-c.intercept))
}

// curves returns the item response functions of group g.
func (s *Simulation) curves(g int) []curve {
	curves := make([]curve, len(s.parameters))
	for i := range curves {
		p := s.parameters[i][g]
		curves[i] = curve{slope: p.A, intercept: -p.A * p.B[0], low: p.C, rise: 1 - p.C}
	}
	return curves
}
