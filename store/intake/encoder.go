package intake

import (
	"slices"
	"strings"
	"unicode/utf8"

	"difaudit/dif"
)

// mode says what the cells of an item may hold besides codes of missing answers.
type mode byte

const (
	presumed  mode = iota // a score 0..10; any other cell shows that the column is no item
	scored                // a score 0..limit
	choices               // one of the declared options
	open                  // any choice
	undecided             // what the cells are shows when all were seen
)

const (
	presumedMax = 10
	maxChoices  = dif.MaxCode + 1
	escape      = 0xFF // in table: the cell needs a closer look
)

// encoder turns the cells of one item into answer codes.
type encoder struct {
	table   [256]byte // by a cell of a single byte: its code, or escape
	missing map[string]byte
	mode    mode
	limit   int             // largest score of presumed and scored items
	max     int             // largest score seen, -1 with none
	labels  []string        // choices by code
	codes   map[string]byte // the other way round
	full    bool            // a choice had no room
	weighed weighing        // of an undecided item
}

func newEncoder(m mode, limit int, labels []string, missing map[string]byte) *encoder {
	e := &encoder{missing: missing, mode: m, limit: limit, max: -1, codes: map[string]byte{}}
	for i := range e.table {
		e.table[i] = escape
	}
	if m == presumed || m == scored {
		for s := 0; s <= min(limit, 9); s++ {
			e.table['0'+s] = byte(s)
		}
	}
	for _, label := range labels {
		e.learn(label)
	}
	for code, c := range missing {
		if len(code) == 1 {
			e.table[code[0]] = c
		}
	}
	return e
}

// learn adds a choice and returns its code; false where there is no room.
func (e *encoder) learn(label string) (byte, bool) {
	if c, known := e.codes[label]; known {
		return c, true
	}
	if len(e.labels) == maxChoices {
		return 0, false
	}
	label = strings.Clone(label)
	c := byte(len(e.labels))
	e.labels = append(e.labels, label)
	e.codes[label] = c
	if len(label) == 1 && e.mode != undecided {
		e.table[label[0]] = c
	}
	return c, true
}

// refusal says why a cell has no code.
type refusal byte

const (
	accepted refusal = iota
	notUTF8
	outOfRange
	tooLong
	noRoom
)

// code returns the answer code of a cell in a row of its file. The code of a refused
// cell is not stored anywhere that counts.
func (e *encoder) code(cell string, row int) (byte, refusal) {
	if len(cell) == 1 {
		if c := e.table[cell[0]]; c != escape {
			if c <= dif.MaxCode && int(c) > e.max {
				e.max = int(c)
			}
			return c, accepted
		}
	}
	cell = strings.TrimSpace(cell)
	if cell == "" {
		return blankCode, accepted
	}
	if c, is := e.missing[cell]; is {
		return c, accepted
	}
	if e.mode == undecided {
		return e.weigh(cell, row)
	}
	if c, is := e.codes[cell]; is {
		return c, accepted
	}
	switch e.mode {
	case presumed, scored:
		if s, ok := plainInteger(cell); ok && s <= e.limit {
			e.max = max(e.max, s)
			return byte(s), accepted
		}
	case open:
		switch {
		case !utf8.ValidString(cell):
			return dif.CodeInvalid, notUTF8
		case len(cell) > maxNameBytes:
			return dif.CodeInvalid, tooLong
		}
		if c, ok := e.learn(cell); ok {
			return c, accepted
		}
		first := !e.full
		e.full = true
		if first {
			return dif.CodeInvalid, noRoom
		}
		return dif.CodeInvalid, accepted // reported once for the item
	}
	if !utf8.ValidString(cell) {
		return dif.CodeInvalid, notUTF8
	}
	return dif.CodeInvalid, outOfRange
}

// plainInteger returns the value of a whole number without sign, decimals or leading
// zeros, up to MaxCode.
func plainInteger(s string) (int, bool) {
	if len(s) == 0 || len(s) > 3 || len(s) > 1 && s[0] == '0' {
		return 0, false
	}
	n := 0
	for i := range len(s) {
		if s[i] < '0' || s[i] > '9' {
			return 0, false
		}
		n = 10*n + int(s[i]-'0')
	}
	return n, n <= dif.MaxCode
}

// recoding is a new code for each code of an item's choices; codes of missing
// answers keep theirs.
type recoding [256]byte

// toScores recodes choices that are whole numbers to those numbers.
func (e *encoder) toScores() *recoding {
	r := sameCodes()
	for c, label := range e.labels {
		n, _ := plainInteger(label)
		r[c] = byte(n)
	}
	return r
}

// toSorted recodes choices to their place in bytewise order and returns them in that order.
func (e *encoder) toSorted() ([]string, *recoding) {
	sorted := slices.Clone(e.labels)
	slices.Sort(sorted)
	r := sameCodes()
	for place, label := range sorted {
		r[e.codes[label]] = byte(place)
	}
	return sorted, r
}

func sameCodes() *recoding {
	var r recoding
	for i := range r {
		r[i] = byte(i)
	}
	return &r
}
