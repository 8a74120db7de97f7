package intake

import (
	"fmt"
	"slices"
	"strings"

	"difaudit/dif"
)

// fewCandidates is the count below which a stored warning does not say how many
// candidates lack a label.
const fewCandidates = 10

// warnings returns what a later reader of the data must know: codes and counts, and
// the items concerned. Small counts that concern group labels stay out of it.
func (r *reading) warnings() []dif.Warning {
	out := []dif.Warning{}
	for _, k := range kinds {
		n := r.problems.Count(k.code)
		if k.severity != Warning || n == 0 {
			continue
		}
		switch {
		case k.code == emptyLabel:
			for _, g := range r.groupings {
				if g.notStated > 0 {
					out = append(out, dif.Warning{Code: k.code, Message: fmt.Sprintf("%s without a stated label of the grouping %s", candidatesWithout(g.notStated), shown(g.name))})
				}
			}
			continue
		case k.code == noCandidateRow:
			out = append(out, dif.Warning{Code: k.code, Message: candidatesWithout(n) + strings.TrimPrefix(k.about, "candidates")})
			continue
		}
		ids := ""
		if k.items {
			n, ids = r.itemsOf(k.code, n)
		}
		out = append(out, dif.Warning{Code: k.code, Message: fmt.Sprintf("%d %s%s", n, either(n, k.one, k.about), ids)})
	}
	return out
}

// candidatesWithout returns a count of candidates that concerns labels, as far as it
// may be kept.
func candidatesWithout(n int) string {
	if n < fewCandidates {
		return fmt.Sprintf("fewer than %d candidates", fewCandidates)
	}
	return plural(n, "candidate")
}

// itemsOf returns how many items a kind that occurred n times concerns, as far as its
// occurrences were kept, and the first of them in brackets.
func (r *reading) itemsOf(code string, n int) (int, string) {
	const most = 10
	var ids []string
	for _, o := range r.problems.kind(code).Occurrences {
		ids = append(ids, o.Column)
	}
	slices.Sort(ids)
	ids = slices.Compact(ids)
	if n <= maxOccurrences {
		n = len(ids)
	}
	more := ""
	if len(ids) > most {
		ids, more = ids[:most], ", ..."
	}
	return n, " (" + strings.Join(ids, ", ") + more + ")"
}
