package intake

import (
	"math"
	"strconv"
	"strings"

	"difaudit/dif"
)

// checkEvery is the number of rows between two looks at the context.
const checkEvery = 1 << 12

// progressEvery is the number of rows between two reports of progress.
const progressEvery = 1 << 14

// records holds what was received, one entry per candidate record: a row of a wide
// file, or a candidate and attempt of a long one.
type records struct {
	ids      *dif.IDs
	answers  *dif.Answers
	rows     []int32      // line of the record, of its first row where it has several
	form     []uint16     // nil: no form known
	attempt  []int32      // nil: no attempt column
	external []float64    // nil: no external score
	labels   [][]uint16   // per used grouping; nil where the response file lacks it
	formless map[int]bool // records whose form could not be told
}

// special holds the places of the columns with a meaning of their own, -1 where absent.
type special struct {
	id, item, response, form, attempt, external int
}

// parseAttempt returns the number of an attempt.
func parseAttempt(cell string, t *table, problems *Problems) int32 {
	n, err := strconv.ParseInt(strings.TrimSpace(cell), 10, 32)
	if err != nil {
		problems.add(valueOutOfRange, t.name, t.row, "attempt", "the attempt is not a whole number; number the attempts 1, 2, ... or leave the column out with --ignore attempt")
	}
	return int32(n)
}

// parseExternal returns an external score, NaN for an empty cell.
func parseExternal(cell string, t *table, problems *Problems) float64 {
	cell = strings.TrimSpace(cell)
	if cell == "" {
		return math.NaN()
	}
	x, err := strconv.ParseFloat(cell, 64)
	if err != nil || math.IsNaN(x) || math.IsInf(x, 0) || strings.ContainsAny(cell, "_xX") {
		problems.add(valueOutOfRange, t.name, t.row, "external_score", "the cell is not a number; write it with a decimal point, or leave it empty where the candidate has no score")
		return math.NaN()
	}
	return x + 0 // no negative zero
}

// formReader tells the form of a row.
type formReader struct {
	set   *formSet
	cells map[string]int // by cell as it stands in the file
}

// read returns the number of the form a cell names, false where there is none.
func (r *formReader) read(cell string, t *table, problems *Problems) (int, bool) {
	if f, known := r.cells[cell]; known {
		return f, true
	}
	id := strings.TrimSpace(cell)
	if id == "" {
		problems.add(formMissing, t.name, t.row, "form", "the row does not say which form the candidate sat; fill the cell, or leave the column out with --ignore form")
		return 0, false
	}
	if id != strings.ToValidUTF8(id, "") {
		problems.add(badEncoding, t.name, t.row, "form", "the cell is not UTF-8; save the file as UTF-8")
		return 0, false
	}
	if len(id) > maxNameBytes {
		problems.add(badValue, t.name, t.row, "form", "the name of the form is longer than %s; shorten it, or check the quotation marks of this row", nameLimit)
		return 0, false
	}
	f, known := r.set.byID[id]
	if !known {
		if r.set.declared {
			problems.add(unknownForm, t.name, t.row, "form", "the form of this row is not in the forms file; add it there or correct the cell")
			return 0, false
		}
		if f, known = r.set.label(id); !known {
			problems.add(tooLarge, t.name, t.row, "form", "the column has more than %d different forms, so it names no forms; leave it out with --ignore form", maxForms)
			return 0, false
		}
	}
	if len(r.cells) < maxForms {
		r.cells[strings.Clone(cell)] = f
	}
	return f, true
}

// refused reports an item cell that has no code.
func refused(why refusal, it *item, cell, column string, t *table, problems *Problems) {
	cell = strings.TrimSpace(cell)
	switch {
	case why == notUTF8:
		problems.add(badEncoding, t.name, t.row, column, "the cell is not UTF-8; save the file as UTF-8")
	case why == noRoom:
		it.overflows(t.name, t.row, column, problems)
	case why == tooLong:
		problems.add(badValue, t.name, t.row, column, "the answer to item %s is longer than %s, which no choice is; declare the column with --ignore if it is no item", shown(it.ID), nameLimit)
	case it.enc.mode == choices:
		problems.add(valueOutOfRange, t.name, t.row, column,
			"%s is not an option of item %s (%s); correct the cell or the options, or declare it as a code of missing answers",
			quoted(cell), shown(it.ID), quoted(strings.Join(it.Options, "|")))
	default:
		advice := "correct the cell, or declare it as a code of missing answers; answers that are choices need a key or options in the items file"
		if plain, is := plainly(cell, it.enc.limit); is {
			advice = "write it as " + plain
		} else if _, err := strconv.ParseFloat(strings.ReplaceAll(cell, ",", "."), 64); err == nil {
			advice = "correct the cell, declare it as a code of missing answers, or declare a larger max_score in the items file"
		}
		problems.add(valueOutOfRange, t.name, t.row, column, "%s is not a score of item %s (whole numbers 0 to %d); %s",
			quoted(cell), shown(it.ID), it.enc.limit, advice)
	}
}

// overflows reports an item with more choices than can be held.
func (it *item) overflows(file string, row int, column string, problems *Problems) {
	problems.add(tooManyChoices, file, row, column,
		"item %s has more than %d different answers up to this row; declare its options, or its column with --ignore", shown(it.ID), maxChoices)
}

// plainly returns a number that is whole and lies between 0 and a limit as a score is
// written; false for any other text.
func plainly(cell string, limit int) (string, bool) {
	x, err := strconv.ParseFloat(strings.ReplaceAll(cell, ",", "."), 64)
	if err != nil || x < 0 || x != math.Trunc(x) || x > float64(limit) {
		return "", false
	}
	return strconv.Itoa(int(x)), true
}
