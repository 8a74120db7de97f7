package intake

import (
	"context"
	"slices"
	"strings"
	"unicode/utf8"
)

const candidateColumn = "candidate_id"

// candidates holds the rows of the candidates file.
type candidates struct {
	table   *table
	index   *index
	rows    []int32    // per candidate: the first row
	labels  [][]uint16 // per used grouping: label per candidate; nil where the file lacks it
	matched []bool     // per candidate: has answers
	unused  []string   // columns the plan does not use
}

// readCandidates reads the candidates file: the labels of every grouping the plan uses.
func readCandidates(ctx context.Context, f *File, rule *headerRule, groupings []*grouping, problems *Problems) (*candidates, error) {
	t, err := openTable(f, rule, problems)
	if t == nil {
		return nil, err
	}
	c := &candidates{table: t, index: newIndex(), labels: make([][]uint16, len(groupings))}
	if !t.require(candidateColumn) {
		return nil, nil
	}
	column := make([]int, len(groupings))
	for g := range groupings {
		i, has := t.column[groupings[g].name]
		column[g] = i
		if has {
			groupings[g].found = true
			c.labels[g] = []uint16{}
		}
	}
	for _, name := range t.header {
		used := slices.ContainsFunc(groupings, func(g *grouping) bool { return g.name == name })
		if name != "" && name != candidateColumn && !used {
			c.unused = append(c.unused, name)
		}
	}
	idColumn := t.column[candidateColumn]
	var id []byte
	for {
		record, err := t.next()
		if err != nil {
			return c, err
		}
		if record == nil {
			break
		}
		if t.rows%checkEvery == 0 && ctx.Err() != nil {
			return c, ctx.Err()
		}
		id = append(id[:0], strings.TrimSpace(record[idColumn])...)
		if !checkID(id, t, problems) {
			continue
		}
		i, isNew := c.index.add(id, 0)
		if isNew {
			c.rows = append(c.rows, int32(t.row))
		}
		differs := false
		for g := range groupings {
			if c.labels[g] == nil {
				continue
			}
			code := groupings[g].read(record[column[g]], t, problems)
			if isNew {
				c.labels[g] = append(c.labels[g], code)
				continue
			}
			before := c.labels[g][i]
			c.labels[g][i] = combine(before, code)
			if c.labels[g][i] == codeSeveral && before != codeSeveral && code != codeSeveral {
				differs = true
				if groupings[g].several == codeSeveral {
					problems.add(severalLabels, t.name, t.row, groupings[g].name,
						"row %d gives the same candidate another label; correct one row, or declare in the plan what several labels become (groupings.%s.several: not_stated, or a label)",
						c.rows[i], groupings[g].name)
				}
			}
		}
		if !isNew && !differs {
			problems.add(duplicateCandidateRow, t.name, t.row, "", "row %d describes the same candidate with the same groups; this row adds nothing", c.rows[i])
		}
	}
	if t.rows == 0 {
		problems.add(noRows, t.name, 0, "", "the candidates file has no row; add one row per candidate")
	}
	c.matched = make([]bool, len(c.rows))
	return c, nil
}

// checkID reports an identifier that cannot be used.
func checkID(id []byte, t *table, problems *Problems) bool {
	switch {
	case len(id) == 0:
		problems.add(emptyCandidateID, t.name, t.row, candidateColumn, "the row has no candidate identifier; give one or remove the row")
	case !utf8.Valid(id):
		problems.add(badEncoding, t.name, t.row, candidateColumn, "the identifier is not UTF-8; save the file as UTF-8")
	case len(id) > maxNameBytes:
		problems.add(badValue, t.name, t.row, candidateColumn, "the identifier is longer than %s; shorten it, or check the quotation marks of this row", nameLimit)
	default:
		return true
	}
	return false
}
