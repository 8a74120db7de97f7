package intake

import (
	"strings"
	"unicode/utf8"

	"difaudit/dif"
)

// An undecided item is one of the items file without key, options and max_score.
// Whether its answers are scores or choices shows when all of them were seen.

// weighing is what is remembered of the answers to an undecided item.
type weighing struct {
	odd       []oddAnswer // the first answers that are no scores
	whole     int         // answers that are whole numbers; counted where odd has some
	other     int         // the others
	lostWhole int         // those of whole and of other without room for their label
	lostOther int
	firstLost int // row of the first of them
}

// oddAnswer is an answer that is no score.
type oddAnswer struct {
	row  int
	text string
}

// weigh returns the answer code of a trimmed cell of an undecided item.
func (e *encoder) weigh(cell string, row int) (byte, refusal) {
	w := &e.weighed
	switch {
	case len(cell) > maxNameBytes:
		return dif.CodeInvalid, tooLong
	case !utf8.ValidString(cell):
		return dif.CodeInvalid, notUTF8
	}
	c, room := e.learn(cell)
	_, whole := plainInteger(cell)
	if !whole && len(w.odd) < maxOccurrences {
		w.odd = append(w.odd, oddAnswer{row, cutAnswer(cell)})
	}
	switch {
	case room && len(cell) == 1 && (whole || len(w.odd) == maxOccurrences):
		e.table[cell[0]] = c // no need to look at it again
	case !room && w.lostWhole+w.lostOther == 0:
		w.firstLost = row
	}
	switch {
	case room:
		return c, accepted
	case whole:
		w.lostWhole++
	default:
		w.lostOther++
	}
	return dif.CodeInvalid, accepted // decide reports it
}

// cutAnswer returns a copy of as much of a cell as a message shows.
func cutAnswer(cell string) string {
	n := 0
	for i := range cell {
		if n > maxQuoted {
			return strings.Clone(cell[:i])
		}
		n++
	}
	return strings.Clone(cell)
}

// countAnswers counts the answers to the undecided items that are not all whole numbers.
func (r *reading) countAnswers() {
	type mixed struct {
		*item
		whole [256]bool // by code
	}
	var items []mixed
	for _, it := range r.items.items {
		if it.broken || it.enc.mode != undecided || len(it.enc.weighed.odd) == 0 {
			continue
		}
		m := mixed{item: it}
		for c, label := range it.enc.labels {
			_, m.whole[c] = plainInteger(label)
		}
		w := &it.enc.weighed
		w.whole, w.other = w.lostWhole, w.lostOther
		items = append(items, m)
	}
	for i := range r.records.rows {
		if len(items) == 0 {
			return
		}
		row := r.records.answers.Row(i)
		for k := range items {
			c, w := row[items[k].index], &items[k].enc.weighed
			switch {
			case c > dif.MaxCode:
			case items[k].whole[c]:
				w.whole++
			default:
				w.other++
			}
		}
	}
}

// decide settles an undecided item. Whole numbers are scores, unless they look like
// the choices of items with a key. Among whole numbers anything else is an error, so
// that a slip does not turn an item with scores into one without; where it prevails
// the answers are choices without a key.
func (it *item) decide(r *reading, keyed *keyedChoices) *recoding {
	e := it.enc
	w := &e.weighed
	if len(w.odd) > 0 {
		switch {
		case w.whole >= w.other:
			r.oddAnswers(it)
			return nil
		case w.lostWhole+w.lostOther > 0:
			it.overflows(r.responses.name, w.firstLost, r.answerColumn(it), r.problems)
			return nil
		}
		r.problems.add(choiceWithoutKey, r.responses.name, w.odd[0].row, shown(it.ID),
			"%s, %s no %s, and the item has no key; it gets no score and no result. Give its key in the items file, or correct the answers",
			plural(w.other, "answer"), either(w.other, "in this row, is", "from this row on, are"), either(w.other, "score", "scores"))
		return it.withoutKey()
	}
	largest, bare := e.wholeNumbers(keyed)
	if bare {
		r.problems.add(keyMissing, it.file, it.row, shown(it.ID),
			"its answers are whole numbers among the choices of the items with a key, and it has neither key, options nor max_score; they were taken as choices, and it gets no score and no result. Give the key, or max_score if these are scores")
		return it.withoutKey()
	}
	it.MaxScore = max(1, largest)
	if keyed.any && largest >= 0 {
		r.problems.add(scoreAssumed, it.file, it.row, shown(it.ID),
			"other items have keys and this one has neither key, options nor max_score; its answers are whole numbers and were taken as scores. Declare max_score, or the key if they are choices")
	}
	return e.toScores()
}

// withoutKey makes an item one of choices without a key.
func (it *item) withoutKey() (recode *recoding) {
	it.MaxScore, it.KeyMissing = 1, true
	it.Options, recode = it.enc.toSorted()
	return recode
}

// oddAnswers reports the answers of an item that are no scores, as most others are.
func (r *reading) oddAnswers(it *item) {
	w := &it.enc.weighed
	for _, odd := range w.odd {
		advice := "correct the cell, declare it as a code of missing answers, or give the item's key or options in the items file if its answers are choices"
		if plain, is := plainly(odd.text, dif.MaxCode); is {
			advice = "write it as " + plain
		}
		r.problems.add(valueOutOfRange, r.responses.name, odd.row, r.answerColumn(it),
			"%s is not a score of item %s, whose other answers are mostly whole numbers (0 to %d can be scores); %s", quoted(odd.text), shown(it.ID), dif.MaxCode, advice)
	}
	if more := w.other - len(w.odd); more > 0 {
		r.problems.kind(valueOutOfRange).Count += more
	}
}

// answerColumn returns the column of the response file with the answers to an item.
func (r *reading) answerColumn(it *item) string {
	if r.long {
		return "response"
	}
	return it.ID
}

// keyedChoices are the choices of the items with a key, declared or seen: their options and
// the labels of their keys.
type keyedChoices struct {
	any     bool // some item has a key
	numbers bool // some choice is a whole number
	labels  map[string]bool
}

func (r *reading) keyedChoices() *keyedChoices {
	k := &keyedChoices{labels: map[string]bool{}}
	for _, it := range r.items.items {
		if len(it.Key) == 0 && len(it.formKeys) == 0 {
			continue
		}
		k.any = true
		for _, labels := range [][]string{it.Options, it.Key, it.formKeys, it.enc.labels} {
			for _, label := range labels {
				_, whole := plainInteger(label)
				k.numbers = k.numbers || whole
				k.labels[label] = true
			}
		}
	}
	return k
}

// wholeNumbers returns the largest of choices that are all whole numbers, -1 with
// none, and whether they look like choices that lack their key: each is a choice of
// some item with a key, and they are not only 0 and 1.
func (e *encoder) wholeNumbers(keyed *keyedChoices) (largest int, bare bool) {
	largest, bare = -1, keyed.numbers
	for _, label := range e.labels {
		n, _ := plainInteger(label)
		largest = max(largest, n)
		bare = bare && keyed.labels[label]
	}
	return largest, bare && largest > 1
}
