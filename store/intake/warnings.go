package intake

import (
	"fmt"
	"slices"
	"strings"

	"difaudit/dif"
)

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
