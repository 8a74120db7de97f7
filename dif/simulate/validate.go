package simulate

import (
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"
	"unicode"
	"unicode/utf8"
)

const (
	maxItems   = 10_000
	maxOptions = 26
	maxGroups  = 1_000
	maxN       = 1 << 36 // candidates of one group
)

// reserved are column names that mean something else in a file of responses.
var reserved = []string{"candidate_id", "item_id", "response", "form", "external_score", "attempt"}

// Validate returns all faults of the design joined, each a sentence that says what
// to change, or nil.
func (d Design) Validate() error {
	d = d.complete()
	return errors.Join(slices.Concat(d.modelFaults(), d.groupFaults(), d.itemFaults())...)
}

func (d Design) modelFaults() []error {
	var faults []error
	fault := func(format string, args ...any) { faults = append(faults, fmt.Errorf(format, args...)) }
	if !slices.Contains(Models(), d.Model) {
		fault("model %q: use rasch, 2pl or 3pl", d.Model)
	}
	if d.Options != 0 && (d.Options < 2 || d.Options > maxOptions) {
		fault("%d options: give 2 to %d, or 0 for scored answers", d.Options, maxOptions)
	}
	if !(d.OmittedShare >= 0 && d.OmittedShare < 1) {
		fault("omitted share %v: give a share from 0 to below 1, such as 0.02", d.OmittedShare)
	}
	if !(d.NotReachedShare >= 0 && d.NotReachedShare <= maxNotReached) {
		fault("not reached share %v: give a share from 0 to %v, such as 0.02", d.NotReachedShare, maxNotReached)
	}
	if !(d.ExternalCorrelation >= 0 && d.ExternalCorrelation <= 1) {
		fault("external correlation %v: give a correlation above 0 and at most 1, or 0 for no external score", d.ExternalCorrelation)
	}
	return faults
}

func (d Design) groupFaults() []error {
	var faults []error
	fault := func(format string, args ...any) { faults = append(faults, fmt.Errorf(format, args...)) }
	if len(d.Groupings) == 0 {
		fault("no grouping is named: name at least one")
	}
	for i, name := range d.Groupings {
		switch {
		case nameFault(name) != "":
			fault("grouping %q %s", name, nameFault(name))
		case slices.Contains(reserved, name):
			fault("grouping %q is the name of another column of the file of responses: choose another name", name)
		case slices.Contains(d.Groupings[:i], name):
			fault("grouping %q is named twice", name)
		}
	}
	if len(d.Groups) < 2 || len(d.Groups) > maxGroups {
		fault("%d groups: give a reference group and at least one focal group, at most %d in all", len(d.Groups), maxGroups)
	}
	for i, g := range d.Groups {
		if len(g.Labels) != len(d.Groupings) {
			fault("group %d has %d labels for %d groupings: give one for each", i+1, len(g.Labels), len(d.Groupings))
		}
		for _, label := range g.Labels {
			if f := nameFault(label); label != "" && f != "" {
				fault("group %d: label %q %s", i+1, label, f)
			}
		}
		if slices.ContainsFunc(d.Groups[:i], func(o Group) bool { return slices.Equal(o.Labels, g.Labels) }) {
			fault("group %d has the labels of an earlier group: give each group its own", i+1)
		}
		if g.N < 1 || g.N > maxN {
			fault("group %d has %d candidates: give at least 1", i+1, g.N)
		}
		if !(math.Abs(g.Mean) <= 10) {
			fault("group %d has a mean ability of %v: give one from -10 to 10", i+1, g.Mean)
		}
		if !(g.SD == 0 || g.SD >= 0.01 && g.SD <= 10) {
			fault("group %d has a standard deviation of ability of %v: give 0, or one from 0.01 to 10", i+1, g.SD)
		}
	}
	return faults
}

func (d Design) itemFaults() []error {
	var faults []error
	if len(d.Items) == 0 || len(d.Items) > maxItems {
		faults = append(faults, fmt.Errorf("%d items: give 1 to %d", len(d.Items), maxItems))
	}
	seen := make(map[string]bool, len(d.Items))
	for i := range d.Items {
		item := &d.Items[i]
		fault := func(format string, args ...any) {
			faults = append(faults, fmt.Errorf("item %d: "+format, append([]any{i + 1}, args...)...))
		}
		switch {
		case nameFault(item.ID) != "":
			fault("identifier %q %s", item.ID, nameFault(item.ID))
		case slices.Contains(reserved, item.ID) || slices.Contains(d.Groupings, item.ID):
			fault("identifier %q is the name of another column: choose another", item.ID)
		case seen[item.ID]:
			fault("identifier %q is used by an earlier item: give each item its own", item.ID)
		}
		seen[item.ID] = true
		if !slices.Contains([]string{roleOperational, rolePretest, roleLinking}, item.Role) {
			fault("role %q: use operational, pretest or linking", item.Role)
		}
		if item.MaxScore != 1 {
			fault("maximum score %d: the models rasch, 2pl and 3pl have items scored 0 or 1", item.MaxScore)
		}
		if item.Key != "" && !slices.Contains(optionLabels(d.Options), item.Key) {
			fault("key %q is none of its %d options", item.Key, d.Options)
		}
		if item.Parameters != nil {
			if f := d.Model.parametersFault(*item.Parameters); f != "" {
				fault("%s", f)
			}
		}
		for k, s := range item.DIF {
			switch {
			case s.Group < 1 || s.Group >= len(d.Groups):
				fault("DIF is planted for group %d: name a focal group, 1 to %d", s.Group, len(d.Groups)-1)
			case slices.ContainsFunc(item.DIF[:k], func(o Shift) bool { return o.Group == s.Group }):
				fault("DIF is planted twice for group %d: give one shift", s.Group)
			}
			if !(math.Abs(s.Delta) <= 20) {
				fault("planted D-DIF %v: give a number from -20 to 20", s.Delta)
			}
			if !(math.Abs(s.Slope) <= 10) {
				fault("planted slope shift %v: give a number from -10 to 10", s.Slope)
			}
			if d.Model == Rasch && s.Slope != 0 {
				fault("a slope shift is planted, but the Rasch model has one slope for all: use 2pl or 3pl")
			}
		}
	}
	if d.Model == Rasch {
		faults = append(faults, commonSlopeFaults(d.Items)...)
	}
	return faults
}

// parametersFault says what is wrong with stated parameters, or returns "".
func (m Model) parametersFault(p Parameters) string {
	switch {
	case !(p.A > 0 && p.A <= 20):
		return fmt.Sprintf("slope %v: give one above 0, at most 20", p.A)
	case len(p.B) != 1:
		return fmt.Sprintf("%d difficulties: give one", len(p.B))
	case !(math.Abs(p.B[0]) <= 20):
		return fmt.Sprintf("difficulty %v: give one from -20 to 20", p.B[0])
	case m == ThreePL && !(p.C >= 0 && p.C < 1):
		return fmt.Sprintf("lower asymptote %v: give one from 0 to below 1", p.C)
	case m != ThreePL && p.C != 0:
		return fmt.Sprintf("lower asymptote %v: give 0, or use the model 3pl", p.C)
	}
	return ""
}

// commonSlopeFaults holds items with stated parameters to one slope, which is 1 when
// parameters of another item are to be drawn.
func commonSlopeFaults(items []Item) []error {
	slope, stated := 1.0, !slices.ContainsFunc(items, func(it Item) bool { return it.Parameters == nil })
	if stated && len(items) > 0 {
		slope = items[0].Parameters.A
	}
	var faults []error
	for i, item := range items {
		if item.Parameters != nil && item.Parameters.A != slope {
			faults = append(faults, fmt.Errorf("item %d: slope %v where others have %v: the Rasch model has one slope for all items", i+1, item.Parameters.A, slope))
		}
	}
	return faults
}

// nameFault says what is wrong with a name that is to stand in a file and in a
// comparison, or returns "".
func nameFault(s string) string {
	switch {
	case s == "":
		return "is empty: give it a name"
	case !utf8.ValidString(s) || strings.ContainsFunc(s, unicode.IsControl):
		return "has characters that cannot be printed: leave them out"
	case strings.TrimSpace(s) != s:
		return "begins or ends with a space: leave it out"
	case strings.ContainsAny(s, ":;+|"):
		return "has one of the characters : ; + | which separate names: leave it out"
	}
	return ""
}
