package reports

import "fmt"

const (
	pictureHeight = 61.0
	pictureWidth  = 112.0
)

// picturesPart draws the flagged items, provisional ones included: the share of right
// answers by matching score beside a sentence on what the picture shows.
func (r *report) picturesPart(c *exposedComparison) {
	if c.withheld {
		return
	}
	flagged := c.flaggedItems()
	if len(flagged) == 0 {
		return
	}
	r.heading("Flagged items", pictureHeight+14)
	text := "Items with letter B or C, also where it is provisional. Adjacent scores are joined so that each point stands for at least 10 candidates of each group; the numbers under a picture say how many."
	r.paragraph(text, caption)
	r.space(1.5)
	reference, focal := distinct(c.Reference, c.Focal)
	curveKey(r, r.left(), r.y+2.5, "reference group: "+reference, "focal group: "+focal, small)
	r.space(6)
	for _, f := range flagged {
		r.picture(f, reference, focal)
	}
}

func (r *report) picture(f *exposedFinding, reference, focal string) {
	r.need(pictureHeight + 2)
	r.line(r.left(), r.y, r.right(), r.y, stroke{hairline, 0.25, false})
	head := style{bold: true, size: 9, ink: navy}
	letter, provisional := f.class()
	outcome := letter + ", " + direction(letter)
	if provisional {
		outcome = "no verdict; provisional " + outcome
	}
	r.putRight(r.right(), r.y+5, outcome, head)
	room := r.width() - r.widthOf(outcome, head) - 6
	r.put(r.left(), r.y+5, shortenMiddle(r.text.clean(fmt.Sprintf("No. %d  %s", f.number, f.name())), room, r.measure(head)), head)
	top := r.y + 7
	points := mergeLevels(f.Strata, f.maxScore, mostPoints)
	if points == nil {
		r.put(r.left()+6, top+20, "Picture withheld: fewer than 10 candidates in a group.", caption)
	} else {
		axis := "proportion correct"
		if f.maxScore > 1 {
			axis = "mean score over the maximum"
		}
		drawCurve(r, r.left(), top, pictureWidth, pictureHeight-8, points, curveLabels{
			reference: reference, focal: focal, vertical: axis,
			hideReference: f.nReference.hiding == complement, hideFocal: f.nFocal.hiding == complement,
		})
	}
	r.pictureText(f, reference, focal, letter, provisional, top+1)
	r.y = top + pictureHeight - 6
}

// pictureText writes the words beside a picture, smaller where long names need it.
func (r *report) pictureText(f *exposedFinding, reference, focal, letter string, provisional bool, y float64) {
	x := r.left() + pictureWidth + 5
	w := r.right() - x
	plain, quietly := style{size: 7.6, ink: ink}, style{size: 7, ink: quiet}
	type part struct {
		text string
		style
	}
	parts := []part{{f.differenceSentence(reference, focal), plain}}
	if provisional {
		parts = append(parts, part{"Letter " + letter + " is provisional: " + f.reasonText() + ".", plain})
	} else {
		parts = append(parts, part{consequence(letter), plain})
	}
	if mh := f.MantelHaenszel(); mh != nil && mh.Delta != nil {
		parts = append(parts, part{fmt.Sprintf("D-DIF %s, 95 %% interval %s to %s", dDIF(mh.Delta), dDIF(mh.DeltaLow), dDIF(mh.DeltaHigh)), quietly})
	}
	if std := f.Standardization(); std != nil && std.PDif != nil {
		parts = append(parts, part{"P-DIF " + fixed(std.PDif, 3), quietly})
	}
	parts = append(parts, part{fmt.Sprintf("Correct, unmatched: %s %s, %s %s", reference, fixed(f.PReference, 2), focal, fixed(f.PFocal, 2)), quietly})
	if f.nonUniform() {
		parts = append(parts, part{"Non-uniform: the difference changes with the score.", style{bold: true, size: 7, ink: ink}})
	}
	const room, gap = pictureHeight - 10, 1.2
	for shrink := 1.0; ; shrink *= 0.92 {
		height := 0.0
		for i := range parts {
			s := parts[i].style
			s.size *= shrink
			height += float64(len(r.wrap(parts[i].text, s, w)))*s.lineHeight() + gap
		}
		if height > room && shrink > 0.4 {
			continue
		}
		for _, p := range parts {
			if p.text == "" {
				continue
			}
			s := p.style
			s.size *= shrink
			for _, line := range r.wrap(p.text, s, w) {
				r.put(x, y+s.size*0.3528, line, s)
				y += s.lineHeight()
			}
			y += gap
		}
		return
	}
}
