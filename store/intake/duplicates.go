package intake

import (
	"bytes"
	"cmp"
	"encoding/binary"
	"fmt"
	"math"
	"slices"
	"strings"

	"difaudit/dif"
)

// order returns the records sorted bytewise by identifier, then by attempt, then by row.
func (rec *records) order() []int32 {
	n := len(rec.rows)
	order := make([]int32, n)
	for i := range order {
		order[i] = int32(i)
	}
	compare := func(a, b int32) int {
		c := bytes.Compare(rec.ids.At(int(a)), rec.ids.At(int(b)))
		if c == 0 && rec.attempt != nil {
			c = cmp.Compare(rec.attempt[a], rec.attempt[b])
		}
		return cmp.Or(c, cmp.Compare(a, b))
	}
	if slices.IsSortedFunc(order, compare) {
		return order
	}
	// Compare eight bytes behind what all identifiers share; only ties look at the rest.
	prefix := rec.ids.At(0)
	for i := range n {
		id := rec.ids.At(i)
		k := 0
		for k < len(prefix) && k < len(id) && prefix[k] == id[k] {
			k++
		}
		prefix = prefix[:k]
	}
	type keyed struct {
		key    uint64
		record int32
	}
	keys := make([]keyed, n)
	for i := range keys {
		var b [8]byte
		copy(b[:], rec.ids.At(i)[len(prefix):])
		keys[i] = keyed{binary.BigEndian.Uint64(b[:]), int32(i)}
	}
	slices.SortFunc(keys, func(a, b keyed) int {
		if a.key != b.key {
			return cmp.Compare(a.key, b.key)
		}
		return compare(a.record, b.record)
	})
	for i := range keys {
		order[i] = keys[i].record
	}
	return order
}

// runs calls f with each stretch of order that has the same identifier and, where
// attempts is set, the same attempt.
func (rec *records) runs(order []int32, attempts bool, f func(run []int32)) {
	for from := 0; from < len(order); {
		to := from + 1
		for to < len(order) && bytes.Equal(rec.ids.At(int(order[from])), rec.ids.At(int(order[to]))) &&
			!(attempts && rec.attempt != nil && rec.attempt[order[from]] != rec.attempt[order[to]]) {
			to++
		}
		f(order[from:to])
		from = to
	}
}

// exclude drops exact copies and the attempts the plan does not want. It returns the
// records kept, in order, and counts of the others.
func (r *reading) exclude(order []int32) (kept []int32, exclusions []dif.Exclusion) {
	rec := r.records
	var copies []int32
	original := map[int32]int32{}
	kept = make([]int32, 0, len(order))
	exclusions = []dif.Exclusion{}
	rec.runs(order, true, func(run []int32) {
		if len(rec.ids.At(int(run[0]))) == 0 {
			return // reported already, and not one candidate
		}
		kept = append(kept, run[0])
		if len(run) == 1 {
			return
		}
		for _, i := range run[1:] {
			if !rec.same(run[0], i) {
				r.conflict(run)
				return
			}
		}
		for _, i := range run[1:] {
			original[i] = run[0]
			copies = append(copies, i)
		}
	})
	slices.Sort(copies)
	for _, i := range copies {
		r.problems.add(exactDuplicate, r.responses.name, int(rec.rows[i]), "", "the row is an exact copy of row %d; it is not used", rec.rows[original[i]])
	}
	exclusions = r.exclusion(dif.ExcludedExactDuplicate, copies, exclusions)
	if rec.attempt == nil || r.plan.Attempts == dif.AttemptsAll {
		return kept, exclusions
	}
	var others, wanted []int32
	rec.runs(kept, false, func(run []int32) {
		pick := run[0]
		if r.plan.Attempts == dif.AttemptsLast {
			pick = run[len(run)-1]
		}
		wanted = append(wanted, pick)
		for _, i := range run {
			if i != pick {
				others = append(others, i)
			}
		}
	})
	return wanted, r.exclusion(dif.ExcludedOtherAttempt, others, exclusions)
}

// same reports whether two records hold the same answers, form and external score.
func (rec *records) same(a, b int32) bool {
	switch {
	case !bytes.Equal(rec.answers.Row(int(a)), rec.answers.Row(int(b))):
		return false
	case rec.form != nil && rec.form[a] != rec.form[b]:
		return false
	case rec.external != nil:
		x, y := rec.external[a], rec.external[b]
		return x == y || math.IsNaN(x) && math.IsNaN(y)
	}
	return true
}

// conflict reports records of one candidate and attempt that differ.
func (r *reading) conflict(run []int32) {
	rec := r.records
	const listed = 20
	var rows []string
	for _, i := range run[:min(len(run), listed)] {
		rows = append(rows, fmt.Sprint(rec.rows[i]))
	}
	if len(run) > listed {
		rows = append(rows, "...")
	}
	advice := "keep one of them, or number the attempts in a column attempt"
	if rec.attempt != nil {
		advice = "keep one of them, or correct the attempt"
	}
	r.problems.add(conflictingDuplicate, r.responses.name, int(rec.rows[run[0]]), "",
		"rows %s hold the same candidate and attempt with different answers; %s", strings.Join(rows, ", "), advice)
}

// exclusion appends the count of records excluded for a reason, then the same by
// grouping and label.
func (r *reading) exclusion(reason string, records []int32, to []dif.Exclusion) []dif.Exclusion {
	if len(records) == 0 {
		return to
	}
	to = append(to, dif.Exclusion{Reason: reason, Count: len(records)})
	for g, grouping := range r.groupings {
		counts := map[string]int{}
		notStated := 0
		for _, i := range records {
			if c := r.records.labels[g][i]; c == 0 || c >= codeUndeclared {
				notStated++
			} else {
				counts[grouping.labels[c-1]]++
			}
		}
		labels := make([]string, 0, len(counts))
		for label := range counts {
			labels = append(labels, label)
		}
		slices.Sort(labels)
		for _, label := range labels {
			to = append(to, dif.Exclusion{Reason: reason, Grouping: &grouping.name, Label: &label, Count: counts[label]})
		}
		if notStated > 0 {
			to = append(to, dif.Exclusion{Reason: reason, Grouping: &grouping.name, Count: notStated})
		}
	}
	return to
}
