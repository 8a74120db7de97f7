package intake

import (
	"fmt"
	"slices"
	"strings"

	"difaudit/dif"
)

// settle joins, checks and orders what was read. It returns nil where errors are left.
func (r *reading) settle() *dif.Data {
	rec := r.records
	people := r.joinCandidates()
	order := rec.order()
	r.combineLabels(order, people)
	kept, exclusions := r.exclude(order)
	r.checkLabels(kept)
	r.checkIdentifiers(order)
	used := make([]bool, len(rec.rows))
	for _, i := range kept {
		used[i] = true
	}
	recodings := r.finishItems()
	r.settleAnswers(used, recodings)
	r.countNotStated(used)
	if r.problems.HasErrors() {
		return nil
	}
	return r.arrange(kept, exclusions)
}

// arrange builds the data from the records kept, in their order.
func (r *reading) arrange(kept []int32, exclusions []dif.Exclusion) *dif.Data {
	rec := r.records
	d := &dif.Data{
		IDs: rec.ids.Arrange(kept), Answers: rec.answers,
		FormOf: pick(rec.form, kept), External: pick(rec.external, kept),
		Sources: r.sources, Received: len(rec.rows), Exclusions: exclusions, Warnings: r.warnings(),
	}
	if r.plan.Attempts == dif.AttemptsAll {
		d.Attempt = pick(rec.attempt, kept)
	}
	d.Answers.Arrange(kept)
	for _, it := range r.items.items {
		d.Items = append(d.Items, it.Item)
	}
	for g, codes := range rec.labels {
		d.Groupings = append(d.Groupings, r.groupings[g].finish(pick(codes, kept)))
	}
	r.forms.finish(d)
	return d
}

// pick returns the values at the given places, nil for nil.
func pick[T any](values []T, places []int32) []T {
	if values == nil {
		return nil
	}
	out := make([]T, len(places))
	for i, p := range places {
		out[i] = values[p]
	}
	return out
}

// finish puts the forms into the data, sorted bytewise.
func (s *formSet) finish(d *dif.Data) {
	ids := make([]string, 0, len(s.forms))
	for _, f := range s.forms {
		ids = append(ids, f.id)
	}
	slices.Sort(ids)
	recode := make([]uint16, len(s.forms))
	for place, id := range ids {
		f := s.forms[s.byID[id]]
		recode[s.byID[id]] = uint16(place)
		out := dif.Form{ID: id}
		for _, e := range f.entries {
			out.Items = append(out.Items, dif.FormItem{Item: e.item.index, Position: e.position, Key: e.key, OptionOrder: e.order})
		}
		d.Forms = append(d.Forms, out)
	}
	for i, f := range d.FormOf {
		d.FormOf[i] = recode[f]
	}
}

// finishItems settles what every item is, now that its answers are known, and returns
// the recodings its answers need; nil where the codes stay.
func (r *reading) finishItems() []*recoding {
	keys := false
	for _, it := range r.items.items {
		keys = keys || len(it.Key) > 0 || len(it.formKeys) > 0
	}
	recodings := make([]*recoding, len(r.items.items))
	for i, it := range r.items.items {
		recodings[i] = it.finish(r, keys)
	}
	return recodings
}

func (it *item) finish(r *reading, keys bool) *recoding {
	e := it.enc
	if it.broken {
		return nil
	}
	switch e.mode {
	case presumed, scored:
		if !it.scoreGiven {
			it.MaxScore = max(1, e.max)
		}
		return nil
	case choices:
		it.MaxScore = 1
		it.reportKey(r)
		return nil
	case open:
		var recode *recoding
		it.MaxScore = 1
		it.Options, recode = e.toSorted()
		it.reportKey(r)
		return recode
	}
	if largest, ok := e.numeric(); ok {
		it.MaxScore = max(1, largest)
		if keys && largest >= 0 {
			r.problems.add(scoreAssumed, it.file, it.row, shown(it.ID),
				"other items have keys and this one has neither key, options nor max_score; its answers are whole numbers and were taken as scores. Declare max_score, or the key if they are choices")
		}
		return e.toScores()
	}
	r.choiceWithoutKey(it)
	var recode *recoding
	it.MaxScore, it.KeyMissing = 1, true
	it.Options, recode = e.toSorted()
	return recode
}

// reportKey reports an item answered with choices that lacks a key, wholly or on some form.
func (it *item) reportKey(r *reading) {
	if len(it.Key) > 0 {
		return
	}
	if len(it.formKeys) == 0 {
		it.KeyMissing = true
		r.problems.add(keyMissing, it.file, it.row, shown(it.ID), "the item has options and no key; it gets no score and no result until its key is given")
		return
	}
	for _, f := range r.forms.forms {
		if e := f.byItem[it.ID]; e != nil && e.item == it && e.key == nil {
			r.problems.add(keyMissing, r.forms.name, e.row, shown(it.ID), "other forms have a key for this item and form %s has none; it gets no score on this form until its key is given", shown(f.id))
		}
	}
}

// choiceWithoutKey reports an item whose answers turned out to be choices.
func (r *reading) choiceWithoutKey(it *item) {
	var isNumber [256]bool
	for c, label := range it.enc.labels {
		_, isNumber[c] = plainInteger(label)
	}
	count, first := 0, int32(0)
	for i := range r.records.rows {
		if c := r.records.answers.Row(i)[it.index]; c <= dif.MaxCode && !isNumber[c] {
			if count == 0 {
				first = r.records.rows[i]
			}
			count++
		}
	}
	r.problems.add(choiceWithoutKey, r.responses.name, int(first), shown(it.ID),
		"%d answers, from this row on, are no scores, and the item has no key; it gets no score and no result. Give its key in the items file, or correct the answers", count)
}

// settleAnswers gives empty cells their meaning, checks answers against forms and
// recodes choices. used marks the records that stay.
func (r *reading) settleAnswers(used []bool, recodings []*recoding) {
	rec := r.records
	plans := r.rowPlans()
	r.lost = r.lost || r.long && r.responses.ragged > 0
	blanks := &blankCount{reading: r, items: make([]int, len(r.items.items)), groups: make([][2]int, len(r.plan.Comparisons))}
	empty := r.plan.Missing.Empty
	type slotRecoding struct {
		slot  int
		codes *recoding
	}
	var recode []slotRecoding
	for i, codes := range recodings {
		if codes != nil && *codes != *sameCodes() {
			recode = append(recode, slotRecoding{i, codes})
		}
	}
	for i := range rec.rows {
		row := rec.answers.Row(i)
		plan := &plans[0]
		if len(plans) > 1 {
			plan = &plans[rec.form[i]]
		}
		if !rec.formless[i] {
			r.clearOffForm(i, row, plan)
		}
		switch {
		case r.forms.broken || r.lost || rec.formless[i]: // what is blank cannot be told
		case empty == "":
			if used[i] {
				blanks.row(i, row)
			}
		case empty == dif.EmptyByPosition && plan.unordered:
			if used[i] {
				blanks.unplaced += countBlanks(row)
			}
		default:
			fillBlanks(row, plan.order, empty)
		}
		for _, s := range recode {
			row[s.slot] = s.codes[row[s.slot]]
		}
	}
	blanks.report()
}

// rowPlan says how the answers of one form are read.
type rowPlan struct {
	order     []int // items on the form in order of presentation
	off       []int // items that are not
	unordered bool  // the order is not known
}

// rowPlans returns one plan per form, or a single one where what forms hold is not declared.
func (r *reading) rowPlans() []rowPlan {
	if !r.forms.declared || r.forms.broken {
		var all rowPlan
		for i := range r.items.items {
			all.order = append(all.order, i)
		}
		all.unordered = r.long && !r.items.declared
		return []rowPlan{all}
	}
	plans := make([]rowPlan, len(r.forms.forms))
	for f, form := range r.forms.forms {
		on := make([]bool, len(r.items.items))
		for _, e := range form.entries {
			if e.item.index < len(on) && r.items.items[e.item.index] == e.item {
				on[e.item.index] = true
				plans[f].order = append(plans[f].order, e.item.index)
			}
		}
		for i := range on {
			if !on[i] {
				plans[f].off = append(plans[f].off, i)
			}
		}
	}
	return plans
}

// clearOffForm sets the items that are not on the candidate's form to not presented.
func (r *reading) clearOffForm(i int, row []byte, plan *rowPlan) {
	for _, slot := range plan.off {
		it, code := r.items.items[slot], row[slot]
		row[slot] = dif.CodeNotPresented
		switch {
		case code == blankCode || code == dif.CodeNotPresented:
		case code <= dif.MaxCode || code == dif.CodeInvalid:
			r.problems.add(answerOffForm, r.responses.name, int(r.records.rows[i]), shown(it.ID),
				"there is an answer and the candidate's form does not hold this item; correct the form of the row or the forms file")
		default:
			r.problems.add(missingCodeOffForm, r.responses.name, int(r.records.rows[i]), shown(it.ID),
				"the candidate's form does not hold this item; the answer counts as not presented")
		}
	}
}

// warnings returns what a later reader of the data must know: codes and counts, and
// the items concerned.
func (r *reading) warnings() []dif.Warning {
	out := []dif.Warning{}
	for _, k := range kinds {
		n := r.problems.Count(k.code)
		if k.severity != Warning || n == 0 {
			continue
		}
		message := fmt.Sprintf("%d %s", n, k.about)
		if k.items {
			var ids []string
			for _, o := range r.problems.kind(k.code).Occurrences {
				ids = append(ids, o.Column)
			}
			slices.Sort(ids)
			ids = slices.Compact(ids)
			if n <= maxOccurrences {
				n = len(ids)
			}
			message = fmt.Sprintf("%d %s (%s)", n, k.about, strings.Join(ids[:min(len(ids), 10)], ", "))
			if len(ids) > 10 {
				message = strings.TrimSuffix(message, ")") + ", ...)"
			}
		}
		out = append(out, dif.Warning{Code: k.code, Message: message})
	}
	return out
}
