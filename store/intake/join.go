package intake

import "slices"

// joinCounts is the outcome of joining responses with the candidates file.
type joinCounts struct {
	matched, onlyResponses, onlyCandidates int
}

// joinCandidates returns, per record, the candidate in the candidates file, -1 with
// none; nil without such a file.
func (r *reading) joinCandidates() []int32 {
	if r.candidates == nil {
		return nil
	}
	people := make([]int32, len(r.records.rows))
	for i := range people {
		p := r.candidates.index.find(r.records.ids.At(i), 0)
		people[i] = int32(p)
		if p >= 0 {
			r.candidates.matched[p] = true
		}
	}
	for _, m := range r.candidates.matched {
		if m {
			r.join.matched++
		} else {
			r.join.onlyCandidates++
		}
	}
	return people
}

// combineLabels gives all records of a candidate the same labels: those of its rows
// and of the candidates file together. order sorts records by identifier.
func (r *reading) combineLabels(order []int32, people []int32) {
	rec := r.records
	for g, grouping := range r.groupings {
		var fromFile []uint16
		if r.candidates != nil {
			fromFile = r.candidates.labels[g]
		}
		if rec.labels[g] == nil {
			rec.labels[g] = make([]uint16, len(rec.rows))
		}
		codes := rec.labels[g]
		rec.runs(order, false, func(run []int32) {
			if len(rec.ids.At(int(run[0]))) == 0 {
				return // reported already, and not one candidate
			}
			code := uint16(0)
			alone := codeSeveral != codes[run[0]]
			for _, i := range run {
				alone = alone && codes[i] != codeSeveral
				code = combine(code, codes[i])
			}
			if fromFile != nil && people[run[0]] >= 0 {
				stated := fromFile[people[run[0]]]
				alone = alone && stated != codeSeveral
				code = combine(code, stated)
			}
			if code == codeSeveral {
				code = grouping.several
				grouping.faulty = grouping.faulty || code == codeSeveral
				if code == codeSeveral && alone {
					row := rec.rows[run[len(run)-1]]
					r.problems.add(severalLabels, r.responses.name, int(row), grouping.name,
						"the labels of this candidate differ between its rows or files (its first response row is %d); correct them, or declare in the plan what several labels become (groupings.%s.several: not_stated, or a label)",
						rec.rows[run[0]], grouping.name)
				}
			}
			for _, i := range run {
				codes[i] = code
			}
		})
	}
	if people == nil {
		return
	}
	var alone []int32
	rec.runs(order, false, func(run []int32) {
		if people[run[0]] < 0 && len(rec.ids.At(int(run[0]))) > 0 {
			alone = append(alone, rec.rows[run[0]])
		}
	})
	r.join.onlyResponses = len(alone)
	slices.Sort(alone)
	for _, row := range alone {
		r.problems.add(noCandidateRow, r.responses.name, int(row), "",
			"the candidates file has no row for this candidate; its groups count as not stated there. Add the row, or check the identifiers of both files")
	}
}

// countNotStated warns of candidates without a stated label; used marks the records that stay.
func (r *reading) countNotStated(used []bool) {
	for g, codes := range r.records.labels {
		name := r.groupings[g].name
		if !r.groupings[g].found {
			continue
		}
		for i, code := range codes {
			if code == 0 && used[i] {
				r.groupings[g].notStated++
				r.problems.add(emptyLabel, r.responses.name, int(r.records.rows[i]), name,
					"the candidate of this row has no stated label; it is left out of comparisons of %s and counted as not stated", shown(name))
			}
		}
	}
}
