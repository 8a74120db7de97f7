package dif

import (
	"bytes"
	"fmt"
	"slices"
)

// Codes of missing answers in an answer byte. Codes 0 to MaxCode are scores, or
// option indexes where the item has Options.
const (
	MaxCode          = 0xF9
	CodeNotPresented = 0xFA // by design, or the item was not on the candidate's form
	CodeOmitted      = 0xFB // left blank with a later answer
	CodeNotReached   = 0xFC // left blank, and nothing later answered
	CodeInvalid      = 0xFD // several marks, off task, unreadable
	CodeTechnical    = 0xFE // lost through a fault of delivery
)

// Roles of an item in its form.
const (
	RoleOperational = "operational"
	RolePretest     = "pretest" // never part of another item's matching score
	RoleLinking     = "linking"
)

// Data is what an audit reads. It is complete when handed to Run and not changed by
// it. Candidates stand in bytewise order of their identifier, then by attempt. The
// same answers read from files or from a database give equal values.
type Data struct {
	Items     []Item
	Forms     []Form     // empty: one form of all items
	Groupings []Grouping // the plain groupings the plan uses, by name

	IDs      *IDs
	Answers  *Answers
	FormOf   []uint16  // per candidate, index into Forms; nil with no form known
	Attempt  []int32   // per candidate; nil where the data name no attempts
	External []float64 // per candidate; nil without an external score; NaN where a candidate has none

	Sources    []Source
	Received   int         // candidate records received: rows of a wide file, candidate and attempt pairs of a long one
	Exclusions []Exclusion // from received to len(candidates), in the order applied
	Warnings   []Warning   // what intake noticed; codes and counts, never values
}

// Item describes one item version.
type Item struct {
	ID, Version string
	Role        string
	MaxScore    int      // highest score; 1 for an item with a key
	Options     []string // labels of raw choices by answer code; nil for an item that arrives scored
	Key         []string // the right options; any of them scores 1
	KeyMissing  bool     // raw choices without a key: no score exists
	ContentArea string
}

// Form lists the items of a form in order of presentation.
type Form struct {
	ID    string
	Items []FormItem // nil: what the form holds was not declared
}

// FormItem is one item on a form.
type FormItem struct {
	Item        int      // index into Data.Items
	Position    int      // order of presentation, ascending
	Key         []string // as this form letters the options; nil: the item's key
	OptionOrder []string // the item's options in the order this form shows them; nil: as declared
}

// Grouping is a labelled attribute of the candidates.
type Grouping struct {
	Name   string
	Labels []string // sorted bytewise
	Codes  []uint16 // per candidate: 0 not stated, else 1 + index into Labels
}

// Source describes one file, or upload, the data came from.
type Source struct {
	Administration *string `json:"administration"`
	Form           *string `json:"form"`
	Kind           string  `json:"kind"` // responses, items, forms, candidates
	SHA256         string  `json:"sha256"`
	Rows           int     `json:"rows"`
}

// Exclusion counts candidate records that did not enter the analysis for one
// reason. An entry with a Grouping splits the entry of the same reason without one
// by label (Label nil: not stated), and is not to be added to it.
type Exclusion struct {
	Reason   string  `json:"reason"`
	Grouping *string `json:"grouping"`
	Label    *string `json:"label"`
	Count    int     `json:"count"`
}

// Reasons of an Exclusion.
const (
	ExcludedExactDuplicate = "exact_duplicate"
	ExcludedOtherAttempt   = "other_attempt"
)

// Warning tells the reader of a result something that does not stop it.
type Warning struct {
	Code    string `json:"code"`
	Message string `json:"message"`
}

// IDs holds candidate identifiers in one block of memory.
type IDs struct {
	block []byte
	ends  []uint64
}

// Append adds an identifier.
func (s *IDs) Append(id []byte) {
	s.block = append(s.block, id...)
	s.ends = append(s.ends, uint64(len(s.block)))
}

// Len returns the number of identifiers.
func (s *IDs) Len() int { return len(s.ends) }

// At returns identifier i; the bytes must not be changed.
func (s *IDs) At(i int) []byte {
	var from uint64
	if i > 0 {
		from = s.ends[i-1]
	}
	return s.block[from:s.ends[i]]
}

// Arrange returns the identifiers in the given order, which may leave some out.
func (s *IDs) Arrange(order []int32) *IDs {
	out := &IDs{block: make([]byte, 0, len(s.block)), ends: make([]uint64, 0, len(order))}
	for _, i := range order {
		out.Append(s.At(int(i)))
	}
	return out
}

const answerChunk = 1 << 13 // rows of one block of Answers

// Answers holds one byte per candidate and item, candidate by candidate, in blocks,
// so that it grows without copying.
type Answers struct {
	items  int
	rows   int
	chunks [][]byte
}

// NewAnswers returns an empty matrix with the given number of items.
func NewAnswers(items int) *Answers { return &Answers{items: items} }

// Len returns the number of candidates.
func (a *Answers) Len() int { return a.rows }

// Items returns the number of items.
func (a *Answers) Items() int { return a.items }

// Append adds a row of zeros and returns it to be filled.
func (a *Answers) Append() []byte {
	if a.rows == len(a.chunks)*answerChunk {
		a.chunks = append(a.chunks, make([]byte, answerChunk*a.items))
	}
	a.rows++
	return a.Row(a.rows - 1)
}

// Row returns the answers of candidate i, one byte per item.
func (a *Answers) Row(i int) []byte {
	from := (i % answerChunk) * a.items
	return a.chunks[i/answerChunk][from : from+a.items : from+a.items]
}

// Arrange puts the rows named in order first, in that order, and drops the rest. It
// works in place: order must name each row at most once.
func (a *Answers) Arrange(order []int32) {
	// Follow the cycles of the permutation that sends row order[i] to place i and the
	// rows left out behind them.
	source := make([]int32, a.rows)
	used := make([]bool, a.rows)
	copy(source, order)
	for _, i := range order {
		used[i] = true
	}
	next := len(order)
	for i := range used {
		if !used[i] {
			source[next] = int32(i)
			next++
		}
	}
	buffer := make([]byte, a.items)
	for start := range source {
		if source[start] == int32(start) {
			continue
		}
		copy(buffer, a.Row(start))
		place := start
		for {
			from := int(source[place])
			source[place] = int32(place)
			if from == start {
				copy(a.Row(place), buffer)
				break
			}
			copy(a.Row(place), a.Row(from))
			place = from
		}
	}
	a.rows = len(order)
	a.chunks = a.chunks[:(a.rows+answerChunk-1)/answerChunk]
}

// Candidates returns the number of candidate records to be analysed.
func (d *Data) Candidates() int { return d.Answers.Len() }

// check returns an error where the parts of the data do not fit together; every
// such error is a fault of the code that built the data.
func (d *Data) check() error {
	n := d.Candidates()
	switch {
	case d.Answers.Items() != len(d.Items):
		return fmt.Errorf("data: %d answer columns for %d items", d.Answers.Items(), len(d.Items))
	case d.IDs.Len() != n:
		return fmt.Errorf("data: %d identifiers for %d candidates", d.IDs.Len(), n)
	case d.FormOf != nil && len(d.FormOf) != n, d.Attempt != nil && len(d.Attempt) != n,
		d.External != nil && len(d.External) != n:
		return fmt.Errorf("data: form, attempt or external score not given for every candidate")
	}
	for i := range d.FormOf {
		if int(d.FormOf[i]) >= len(d.Forms) {
			return fmt.Errorf("data: candidate %d has a form that is not described", i+1)
		}
	}
	for _, g := range d.Groupings {
		if len(g.Codes) != n || !slices.IsSorted(g.Labels) {
			return fmt.Errorf("data: grouping %s is not given for every candidate, or its labels are not sorted", g.Name)
		}
		for _, c := range g.Codes {
			if int(c) > len(g.Labels) {
				return fmt.Errorf("data: grouping %s has a code without a label", g.Name)
			}
		}
	}
	for i := 1; i < n; i++ {
		c := bytes.Compare(d.IDs.At(i-1), d.IDs.At(i))
		if c > 0 || c == 0 && (d.Attempt == nil || d.Attempt[i-1] >= d.Attempt[i]) {
			return fmt.Errorf("data: candidates %d and %d are not in order of identifier and attempt", i, i+1)
		}
	}
	for i, item := range d.Items {
		if item.MaxScore < 0 || item.MaxScore > MaxCode || len(item.Options) > MaxCode+1 {
			return fmt.Errorf("data: item %d has a maximum score or a number of options above %d", i+1, MaxCode)
		}
	}
	return nil
}

// scoreTable maps an answer code of one item to its score. Codes of missing answers
// and options without a key map to noScore.
type scoreTable [256]uint8

const noScore = 0xFF

// scoreTables returns the score of each code per form and item: tables[form][item],
// with a single entry where no form is known.
func (d *Data) scoreTables() [][]*scoreTable {
	common := make([]*scoreTable, len(d.Items))
	for i := range d.Items {
		common[i] = d.Items[i].scores(d.Items[i].Key)
	}
	tables := make([][]*scoreTable, max(1, len(d.Forms)))
	for f := range tables {
		tables[f] = slices.Clone(common)
		if f < len(d.Forms) {
			for _, fi := range d.Forms[f].Items {
				if fi.Key != nil {
					tables[f][fi.Item] = d.Items[fi.Item].scores(fi.Key)
				}
			}
		}
	}
	return tables
}

// scores returns the score of every code under the given key.
func (it *Item) scores(key []string) *scoreTable {
	t := new(scoreTable)
	for c := range t {
		t[c] = noScore
	}
	switch {
	case it.Options == nil && !it.KeyMissing:
		for s := 0; s <= it.MaxScore; s++ {
			t[s] = uint8(s)
		}
	case len(key) > 0:
		for c, label := range it.Options {
			t[c] = 0
			if slices.Contains(key, label) {
				t[c] = 1
			}
		}
	default: // raw choices without a key have no score
		return t
	}
	t[CodeOmitted], t[CodeInvalid] = 0, 0
	return t
}

// keyed reports whether some form scores the item.
func (d *Data) keyed(item int) bool {
	it := &d.Items[item]
	if it.Options == nil && !it.KeyMissing || len(it.Key) > 0 {
		return true
	}
	for _, f := range d.Forms {
		for _, fi := range f.Items {
			if fi.Item == item && len(fi.Key) > 0 {
				return true
			}
		}
	}
	return false
}
