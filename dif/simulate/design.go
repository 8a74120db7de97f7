package simulate

import (
	"fmt"
	"slices"
)

// Design says what to simulate. The zero value of a field means none of it, unless
// the field says otherwise.
type Design struct {
	Model     Model
	Seed      int64
	Groupings []string // names of the attributes that Group.Labels gives; at least one
	Groups    []Group  // at least two, the reference group first
	Items     []Item   // in order of presentation

	// Options is the number of options of every item, labelled A, B, and so on. With
	// 0 the answers are scores, else they are the options chosen.
	Options int

	// OmittedShare is the expected share of the reached answers that are left blank
	// with a later answer. Only answers that would have been wrong are left blank, so
	// that a blank counted as wrong leaves the model as it is; the share can therefore
	// not exceed what is wrong.
	OmittedShare float64

	// NotReachedShare is the expected share of all answers that are blank because the
	// candidate ran out of time: at most 0.25, and the same in every group and at
	// every ability.
	NotReachedShare float64

	// ExternalCorrelation, above 0 and at most 1, adds an external score: a whole
	// number with mean 50 and standard deviation 10 where abilities have mean 0 and
	// standard deviation 1, and with this correlation to ability there.
	ExternalCorrelation float64
}

// Group is a set of candidates with the same labels and one distribution of ability.
type Group struct {
	Labels []string // one for each of Design.Groupings; empty: not stated
	N      int      // candidates
	Mean   float64  // of ability
	SD     float64  // of ability; 0 gives every candidate the mean
}

// Item describes one item.
type Item struct {
	ID         string      // empty: Q001, Q002 and so on by position
	Role       string      // operational (also when empty), pretest or linking
	MaxScore   int         // 0 means 1, the only one the present models have
	Parameters *Parameters // in the reference group; nil: drawn, see Simulation.Items
	Key        string      // label of the right option; empty: drawn; only with Design.Options
	DIF        []Shift     // at most one for each focal group
}

// Shift plants DIF in one item for one focal group.
//
// With the slope and difficulty (a_F, b_F) of the focal group and (a_R, b_R) of the
// reference group,
//
//	a_F = a_R + Slope,   b_F = b_R - Delta / (2.35 a_F),
//
// so that Delta = -2.35 a_F (b_F - b_R). With equal slopes and no guessing the log
// odds of a correct answer differ by Delta/2.35 at every ability, and Delta is the
// D-DIF that the Mantel-Haenszel method estimates (Holland & Thayer 1988; Roussos,
// Schnipke & Pashley 1999; both from memory). With unequal slopes they differ by that
// much at θ = b_R.
type Shift struct {
	Group int     // index into Design.Groups, from 1
	Delta float64 // on the D-DIF scale; negative: harder for the focal group
	Slope float64 // added to the slope; not under the Rasch model
}

// NewItems returns n operational items whose parameters are to be drawn.
func NewItems(n int) []Item {
	items := make([]Item, n)
	for i := range items {
		items[i] = Item{ID: itemID(i), Role: roleOperational, MaxScore: 1}
	}
	return items
}

const (
	roleOperational = "operational"
	rolePretest     = "pretest"
	roleLinking     = "linking"
)

// deltaScale turns a difference of log odds into D-DIF: 4/1.7, rounded as published
// (Holland & Thayer 1988, from memory).
const deltaScale = 2.35

func itemID(i int) string { return fmt.Sprintf("Q%03d", i+1) }

// complete returns a copy of the design with what empty fields of items stand for.
func (d Design) complete() Design {
	d.Groupings = slices.Clone(d.Groupings)
	d.Groups = slices.Clone(d.Groups)
	for i := range d.Groups {
		d.Groups[i].Labels = slices.Clone(d.Groups[i].Labels)
	}
	items := make([]Item, len(d.Items))
	for i, item := range d.Items {
		if item.ID == "" {
			item.ID = itemID(i)
		}
		if item.Role == "" {
			item.Role = roleOperational
		}
		if item.MaxScore == 0 {
			item.MaxScore = 1
		}
		item.DIF = slices.Clone(item.DIF)
		items[i] = item
	}
	d.Items = items
	return d
}
