package intake

import (
	"math"
	"strings"
)

// suspect is a column that is neither an item nor declared, and some of its cells,
// to say what it looks like.
type suspect struct {
	name     string
	field    int
	row      int // first row that shows it
	cells    int
	distinct map[string]bool
	bytes    int
	spaces   int
}

// look remembers some cells of a column.
func (s *suspect) look(cell string) {
	const enough = 200
	cell = strings.TrimSpace(cell)
	if s.cells == enough || cell == "" || len(cell) > 1000 {
		return
	}
	s.cells++
	s.distinct[strings.Clone(cell)] = true
	s.bytes += len(cell)
	if strings.Contains(cell, " ") {
		s.spaces++
	}
}

// report says what to do about the column.
func (s *suspect) report(t *table, itemsDeclared bool, problems *Problems) {
	looks := ""
	switch {
	case s.cells >= 10 && len(s.distinct) == s.cells && s.spaces == 0:
		looks = " It looks like an identifier: no value occurs twice."
	case s.cells > 0 && s.spaces*2 > s.cells && s.bytes > 15*s.cells:
		looks = " It looks like free text."
	case s.cells >= 10 && float64(len(s.distinct)) <= math.Sqrt(float64(s.cells))+2:
		looks = " It looks like a grouping: few values that occur again and again."
	}
	if itemsDeclared {
		problems.add(undeclaredColumn, t.name, s.row, s.name,
			"the column is not in the items file and not declared; add the item there, or declare the column with --groupings or --ignore.%s", looks)
		return
	}
	problems.add(undeclaredColumn, t.name, s.row, s.name,
		"this row has a value that is no whole number 0 to 10 and no declared code of missing answers, so the column is no scored item; declare it with --groupings or --ignore, declare the codes of missing answers, or give an items file if the cells are answers.%s", looks)
}
