package simulate

import (
	"strconv"
	"strings"
)

// Layout writes a simulation as lines of comma-separated values (RFC 4180 with line
// feeds): a file of responses with one row for each candidate, one of items, and one
// of candidates where the group labels stand apart from the responses. Its methods
// append to a buffer and return it.
type Layout struct {
	simulation *Simulation
	labels     []string // by group: its labels as cells, a comma before each
	apart      bool
}

// NewLayout returns the layout of a simulation; with labelsApart the group labels
// stand in the file of candidates only.
func NewLayout(s *Simulation, labelsApart bool) *Layout {
	l := &Layout{simulation: s, apart: labelsApart}
	for _, g := range s.design.Groups {
		l.labels = append(l.labels, cells(g.Labels))
	}
	return l
}

// ResponsesHeader appends the header of the file of responses: candidate_id, the
// groupings, external_score where there is one, and the items.
func (l *Layout) ResponsesHeader(b []byte) []byte {
	d := &l.simulation.design
	b = append(b, "candidate_id"...)
	if !l.apart {
		b = append(b, cells(d.Groupings)...)
	}
	if d.ExternalCorrelation > 0 {
		b = append(b, ",external_score"...)
	}
	for i := range d.Items {
		b = append(b, ',')
		b = append(b, cell(d.Items[i].ID)...)
	}
	return append(b, '\n')
}

// Responses appends the row of a candidate. Answers are scores or the labels of
// options; blank ones are empty cells.
func (l *Layout) Responses(b []byte, c *Candidate) []byte {
	d := &l.simulation.design
	b = append(b, c.ID...)
	if !l.apart {
		b = append(b, l.labels[c.Group]...)
	}
	if d.ExternalCorrelation > 0 {
		b = append(b, ',')
		b = strconv.AppendInt(b, int64(c.External), 10)
	}
	first := byte('0') // the character of code 0
	if d.Options > 0 {
		first = 'A'
	}
	for _, a := range c.Answers {
		if a == Omitted || a == NotReached {
			b = append(b, ',')
		} else {
			b = append(b, ',', first+a)
		}
	}
	return append(b, '\n')
}

// CandidatesHeader appends the header of the file of candidates.
func (l *Layout) CandidatesHeader(b []byte) []byte {
	b = append(b, "candidate_id"...)
	b = append(b, cells(l.simulation.design.Groupings)...)
	return append(b, '\n')
}

// Candidates appends the row of a candidate to the file of candidates.
func (l *Layout) Candidates(b []byte, c *Candidate) []byte {
	b = append(b, c.ID...)
	b = append(b, l.labels[c.Group]...)
	return append(b, '\n')
}

// Items appends the whole file of items: with scored answers item_id, max_score and
// role, with raw choices item_id, key, options and role.
func (l *Layout) Items(b []byte) []byte {
	d := &l.simulation.design
	options := optionLabels(d.Options)
	if d.Options > 0 {
		b = append(b, "item_id,key,options,role\n"...)
	} else {
		b = append(b, "item_id,max_score,role\n"...)
	}
	for i, item := range d.Items {
		b = append(b, cell(item.ID)...)
		if d.Options > 0 {
			b = append(b, cells([]string{options[l.simulation.choices[i].key], strings.Join(options, "|")})...)
		} else {
			b = append(b, ',')
			b = strconv.AppendInt(b, int64(item.MaxScore), 10)
		}
		b = append(b, ',')
		b = append(b, item.Role...)
		b = append(b, '\n')
	}
	return b
}

// cells returns the values as cells of a row, a comma before each.
func cells(values []string) string {
	var b strings.Builder
	for _, v := range values {
		b.WriteByte(',')
		b.WriteString(cell(v))
	}
	return b.String()
}

// cell quotes a value where a comma or a quote in it asks for that; names have no
// line breaks.
func cell(v string) string {
	if !strings.ContainsAny(v, `,"`) {
		return v
	}
	return `"` + strings.ReplaceAll(v, `"`, `""`) + `"`
}
