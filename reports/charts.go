package reports

import (
	"math"

	"github.com/jung-kurt/gofpdf"
)

// stroke is how a line is drawn: width in millimetres.
type stroke struct {
	ink    colour
	width  float64
	dashed bool
}

// canvas is what charts draw on, in millimetres from the upper left corner of the page.
type canvas interface {
	line(x1, y1, x2, y2 float64, s stroke)
	box(x, y, w, h float64, fill colour)
	shape(points []point, s stroke, fill *colour)
	disc(x, y, r float64, s stroke, fill *colour)
	put(x, baseline float64, text string, s style)
	putRight(x, baseline float64, text string, s style)
	putCentre(x, baseline float64, text string, s style)
	widthOf(text string, s style) float64
}

type point struct{ x, y float64 }

var _ canvas = (*document)(nil)

func (d *document) setStroke(s stroke) {
	d.pdf.SetDrawColor(s.ink.r, s.ink.g, s.ink.b)
	d.pdf.SetLineWidth(s.width)
	if s.dashed {
		d.pdf.SetDashPattern([]float64{1.6, 1.1}, 0)
	} else {
		d.pdf.SetDashPattern([]float64{}, 0)
	}
}

func (d *document) line(x1, y1, x2, y2 float64, s stroke) {
	d.setStroke(s)
	d.pdf.Line(x1, y1, x2, y2)
}

// box fills a rectangle without an outline.
func (d *document) box(x, y, w, h float64, fill colour) {
	d.pdf.SetFillColor(fill.r, fill.g, fill.b)
	d.pdf.Rect(x, y, w, h, "F")
}

// paint says whether a shape is filled; hollow shapes are filled with white so that
// lines do not run through them.
func (d *document) paint(s stroke, fill *colour) {
	s.dashed = false
	d.setStroke(s)
	if fill == nil {
		fill = &colour{255, 255, 255}
	}
	d.pdf.SetFillColor(fill.r, fill.g, fill.b)
}

func (d *document) shape(points []point, s stroke, fill *colour) {
	d.paint(s, fill)
	corners := make([]gofpdf.PointType, len(points))
	for i, p := range points {
		corners[i] = gofpdf.PointType{X: p.x, Y: p.y}
	}
	d.pdf.Polygon(corners, "FD")
}

func (d *document) disc(x, y, r float64, s stroke, fill *colour) {
	d.paint(s, fill)
	d.pdf.Circle(x, y, r, "FD")
}

// square and triangle are marks around a point; a triangle points left (-1) or right (1).
func square(c canvas, x, y, r float64, s stroke, fill *colour) {
	c.shape([]point{{x - r, y - r}, {x + r, y - r}, {x + r, y + r}, {x - r, y + r}}, s, fill)
}

func triangle(c canvas, x, y, r float64, direction float64, s stroke, fill *colour) {
	c.shape([]point{{x + direction*r*1.25, y}, {x - direction*r*0.9, y - r*1.1}, {x - direction*r*0.9, y + r*1.1}}, s, fill)
}

// scale maps values from low to high onto positions from a to b.
type scale struct{ low, high, a, b float64 }

func (s scale) at(v float64) float64 {
	return s.a + (v-s.low)/(s.high-s.low)*(s.b-s.a)
}

// ticks returns round values inside the scale, at most n of them where possible.
func (s scale) ticks(n int) []float64 {
	span := s.high - s.low
	if !(span > 0) || math.IsInf(span, 0) {
		return nil
	}
	step := math.Pow(10, math.Floor(math.Log10(span/float64(n))))
	for _, m := range []float64{1, 2, 5, 10} {
		if span/(m*step) <= float64(n) {
			step *= m
			break
		}
	}
	var out []float64
	for i := math.Ceil(s.low/step - 1e-9); i*step <= s.high+1e-9*span && len(out) < 50; i++ {
		v := i * step
		if step < 1 {
			v = i / math.Round(1/step) // the nearest number to a short decimal
		}
		out = append(out, v)
	}
	return out
}

// spread moves sorted positions apart to a least distance, inside low to high, and as
// little as a pass in each direction allows.
func spread(at []float64, gap, low, high float64) []float64 {
	out := make([]float64, len(at))
	for i, v := range at {
		out[i] = max(v, low)
		if i > 0 {
			out[i] = max(out[i], out[i-1]+gap)
		}
	}
	for i := len(out) - 1; i >= 0; i-- {
		limit := high
		if i+1 < len(out) {
			limit = out[i+1] - gap
		}
		out[i] = min(out[i], limit)
	}
	return out
}
