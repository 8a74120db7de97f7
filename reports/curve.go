package reports

import (
	"cmp"
	"slices"
	"strings"

	"difaudit/dif"
)

// curvePoint is a run of adjacent matching scores with at least ten candidates of each group.
type curvePoint struct {
	score                        float64 // mean of the candidates
	nReference, nFocal           int
	shareReference, shareFocal   float64 // mean item score over its maximum
	sumScore, sumReference, sumF float64
}

// mostPoints is how many points a curve shows.
const mostPoints = 14

// mergeLevels joins adjacent matching scores, over presented sets, until every point
// holds at least ten candidates of each group; what is left over at the upper end
// joins the last point. Where that leaves more than most points, the two neighbours
// with the fewest candidates are joined, and so on. It returns nil when there are not
// ten of each group in all.
func mergeLevels(strata []dif.StratumSummary, maxScore, most int) []curvePoint {
	sorted := slices.Clone(strata)
	slices.SortStableFunc(sorted, func(a, b dif.StratumSummary) int { return cmp.Compare(a.Score, b.Score) })
	var points []curvePoint
	var open curvePoint
	for i, s := range sorted {
		open.join(levelPoint(s))
		sameScoreFollows := i+1 < len(sorted) && sorted[i+1].Score == s.Score
		if open.nReference >= smallest && open.nFocal >= smallest && !sameScoreFollows {
			points = append(points, open)
			open = curvePoint{}
		}
	}
	if len(points) == 0 {
		return nil
	}
	points[len(points)-1].join(open)
	for len(points) > most {
		least := 0
		for i := range len(points) - 1 {
			if points[i].n()+points[i+1].n() < points[least].n()+points[least+1].n() {
				least = i
			}
		}
		points[least].join(points[least+1])
		points = slices.Delete(points, least+1, least+2)
	}
	for i := range points {
		points[i].finish(maxScore)
	}
	return points
}

func levelPoint(s dif.StratumSummary) curvePoint {
	return curvePoint{
		nReference: s.NReference, nFocal: s.NFocal,
		sumScore:     s.Score * float64(s.NReference+s.NFocal),
		sumReference: s.MeanReference * float64(s.NReference),
		sumF:         s.MeanFocal * float64(s.NFocal),
	}
}

func (p *curvePoint) n() int { return p.nReference + p.nFocal }

func (p *curvePoint) join(q curvePoint) {
	p.nReference += q.nReference
	p.nFocal += q.nFocal
	p.sumScore += q.sumScore
	p.sumReference += q.sumReference
	p.sumF += q.sumF
}

func (p *curvePoint) finish(maxScore int) {
	most := float64(max(1, maxScore))
	p.score = p.sumScore / float64(p.n())
	p.shareReference = p.sumReference / float64(p.nReference) / most
	p.shareFocal = p.sumF / float64(p.nFocal) / most
}

// curveLabels are the words of a curve picture.
type curveLabels struct {
	reference, focal string // group labels, clean and short
	vertical         string
	// A group whose size must not be told has no counts under the picture.
	hideReference, hideFocal bool
}

const (
	curveGutter = 21.0 // left of the plot, for tick labels and the names of the counts
	curveFoot   = 18.0 // below the plot
)

var (
	referenceStroke = stroke{navy, 0.45, false}
	focalStroke     = stroke{amber, 0.45, true}
)

// drawCurve draws the share of right answers by matching score for both groups into
// the box: the reference group as a solid line with filled squares, the focal group as
// a dashed line with hollow circles, and under the axis how many candidates each point
// stands for.
func drawCurve(c canvas, x, y, w, h float64, points []curvePoint, l curveLabels) {
	tick := style{size: 6.2, ink: quiet}
	left, right, top, bottom := x+curveGutter, x+w-2, y+5, y+h-curveFoot
	vertical := scale{0, 1, bottom, top}
	for _, v := range []struct {
		at    float64
		label string
	}{{0, "0"}, {0.25, "0.25"}, {0.5, "0.50"}, {0.75, "0.75"}, {1, "1"}} {
		c.line(left, vertical.at(v.at), right, vertical.at(v.at), stroke{hairline, 0.12, false})
		c.putRight(left-1.5, vertical.at(v.at)+0.8, v.label, tick)
	}
	c.line(left, bottom, right, bottom, stroke{quiet, 0.25, false})
	c.put(x, y+2.2, l.vertical, tick)

	low, high := points[0].score, points[len(points)-1].score
	reach := max((high-low)*0.05, 0.5)
	horizontal := scale{low - reach, high + reach, left, right}
	for _, v := range horizontal.ticks(10) {
		c.line(horizontal.at(v), bottom, horizontal.at(v), bottom+0.9, stroke{quiet, 0.2, false})
		c.putCentre(horizontal.at(v), bottom+3.4, shortest(&v), tick)
	}
	c.putCentre((left+right)/2, bottom+6.6, "matching score", tick)

	for i := 1; i < len(points); i++ {
		p, q := points[i-1], points[i]
		c.line(horizontal.at(p.score), vertical.at(p.shareReference), horizontal.at(q.score), vertical.at(q.shareReference), referenceStroke)
		c.line(horizontal.at(p.score), vertical.at(p.shareFocal), horizontal.at(q.score), vertical.at(q.shareFocal), focalStroke)
	}
	at := make([]float64, len(points))
	for i, p := range points {
		at[i] = horizontal.at(p.score)
		referenceMark(c, at[i], vertical.at(p.shareReference))
		focalMark(c, at[i], vertical.at(p.shareFocal))
	}

	number := tick
	number.ink = ink
	widest := 0.0
	for _, p := range points {
		widest = max(widest, c.widthOf(whole(max(p.nReference, p.nFocal)), number))
	}
	if room := (right - left + 2) / float64(len(points)); widest+1 > room {
		number.size *= room / (widest + 1)
		widest = room - 1
	}
	columns := spread(at, widest+1, left+widest/2, right-widest/2+2)
	rowR, rowF := bottom+11, bottom+14.6
	referenceMark(c, x+1.2, rowR-0.85)
	c.put(x+3.2, rowR, shorten(l.reference, curveGutter-5, func(t string) float64 { return c.widthOf(t, tick) }), tick)
	focalMark(c, x+1.2, rowF-0.85)
	c.put(x+3.2, rowF, shorten(l.focal, curveGutter-5, func(t string) float64 { return c.widthOf(t, tick) }), tick)
	for i, p := range points {
		if !l.hideReference {
			c.putCentre(columns[i], rowR, whole(p.nReference), number)
		}
		if !l.hideFocal {
			c.putCentre(columns[i], rowF, whole(p.nFocal), number)
		}
	}
	if l.hideReference {
		c.put(left, rowR, "withheld", tick)
	}
	if l.hideFocal {
		c.put(left, rowF, "withheld", tick)
	}
}

func referenceMark(c canvas, x, y float64) { square(c, x, y, 0.85, stroke{navy, 0.2, false}, &navy) }
func focalMark(c canvas, x, y float64)     { c.disc(x, y, 1.05, stroke{amber, 0.45, false}, nil) }

// curveKey draws the meaning of lines and marks, and returns where it ends.
func curveKey(c canvas, x, y float64, reference, focal string, s style) float64 {
	for _, k := range []struct {
		text string
		line stroke
		mark func(canvas, float64, float64)
	}{{reference, referenceStroke, referenceMark}, {focal, focalStroke, focalMark}} {
		c.line(x, y-0.9, x+9, y-0.9, k.line)
		k.mark(c, x+4.5, y-0.9)
		c.put(x+11, y, k.text, s)
		x += 11 + c.widthOf(k.text, s) + 8
	}
	return x
}

// distinct returns two group labels cut to a length at which they still differ.
func distinct(a, b string) (string, string) {
	cut := func(s string) string {
		if r := []rune(s); len(r) > 40 {
			return strings.TrimSpace(string(r[:39])) + "…"
		}
		return s
	}
	if a2, b2 := cut(a), cut(b); a2 != b2 {
		return a2, b2
	}
	return "reference", "focal"
}
