package reports

import (
	"slices"

	"difaudit/dif"
)

// note is a warning that several findings share, with the mark it has in the tables; a
// warning about values the tables do not show has none.
type note struct {
	mark, code, sentence string
	items                []string
}

func (n note) prefix() string {
	if n.mark == "" {
		return ""
	}
	return "(" + n.mark + ") "
}

// notes collects the warnings on findings in the order of first appearance.
func (c *exposedComparison) notes() []note {
	var out []note
	marked := 0
	for i := range c.findings {
		f := &c.findings[i]
		for _, w := range f.Warnings {
			k := slices.IndexFunc(out, func(n note) bool { return n.code == w.Code })
			if k < 0 {
				k = len(out)
				n := note{code: w.Code, sentence: warningSentence(w)}
				if w.Code != dif.WarnBreslowDaySparse {
					n.mark = string(rune('a' + marked%26))
					marked++
				}
				out = append(out, n)
			}
			if !slices.Contains(out[k].items, f.name()) {
				out[k].items = append(out[k].items, f.name())
			}
		}
	}
	return out
}

func (f *exposedFinding) marks(notes []note) string {
	text := ""
	for _, n := range notes {
		if n.mark != "" && f.warned(n.code) {
			if text != "" {
				text += " "
			}
			text += n.mark
		}
	}
	return text
}
