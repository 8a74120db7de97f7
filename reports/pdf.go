package reports

import (
	"bytes"
	"fmt"
	"time"

	"github.com/jung-kurt/gofpdf"
)

// colour is a red-green-blue triple, 0 to 255.
type colour struct{ r, g, b int }

// The report uses ink, greys, and one dark and one warm colour that stay apart in grey
// print and for colour-blind readers. Colour never carries a meaning alone.
var (
	ink      = colour{28, 32, 38}
	quiet    = colour{96, 102, 110}
	hairline = colour{206, 209, 214}
	pale     = colour{243, 244, 246}
	paler    = colour{249, 249, 250}
	navy     = colour{27, 58, 99}
	amber    = colour{184, 92, 18}
)

// style is how a piece of text is set: size in points.
type style struct {
	bold bool
	size float64
	ink  colour
}

var (
	body     = style{size: 8.7, ink: ink}
	bodyBold = style{bold: true, size: 8.7, ink: ink}
	small    = style{size: 7.5, ink: ink}
	caption  = style{size: 7.5, ink: quiet}
)

// lineHeight returns the distance of baselines in millimetres.
func (s style) lineHeight() float64 { return s.size * 0.3528 * 1.42 }

const (
	marginSide   = 18.0 // millimetres
	marginTop    = 20.0
	marginBottom = 19.0
)

// document is a PDF being written from top to bottom: y is the upper edge of the free
// space on the page. It is written twice: the first time to learn on which page each
// section stands and how many pages there are.
type document struct {
	pdf       *gofpdf.Fpdf
	text      *textFilter
	title     string // at the foot of every page, shortened to what fits
	mark      string // beside it and never shortened: which evidence is shown
	running   string // head of the page, naming the section
	landscape bool
	y         float64
	pages     int            // in total; 0 the first time
	places    map[string]int // page of each section heading
	known     map[string]int // the same from the first time
}

func newDocument(title, mark string, date time.Time, first *document) *document {
	pdf := gofpdf.New("P", "mm", "A4", "")
	pdf.SetCatalogSort(true)
	pdf.SetCreationDate(date)
	pdf.SetModificationDate(date)
	pdf.SetAutoPageBreak(false, 0)
	pdf.SetMargins(0, 0, 0)
	pdf.SetProducer("difaudit", true)
	addFonts(pdf)
	d := &document{pdf: pdf, text: newTextFilter(), title: title, mark: mark, places: map[string]int{}}
	pdf.SetTitle(d.text.clean(title), true)
	pdf.SetSubject("Audit of differential item functioning", true)
	if first != nil {
		d.pages, d.known = first.pdf.PageNo(), first.places
	}
	return d
}

// bytes closes the document and returns it.
func (d *document) bytes() ([]byte, error) {
	var b bytes.Buffer
	if err := d.pdf.Output(&b); err != nil {
		return nil, fmt.Errorf("write PDF: %w", err)
	}
	return b.Bytes(), nil
}

func (d *document) pageWidth() float64 {
	w, _ := d.pdf.GetPageSize()
	return w
}

func (d *document) left() float64  { return marginSide }
func (d *document) right() float64 { return d.pageWidth() - marginSide }
func (d *document) width() float64 { return d.right() - d.left() }

// floor is the lower edge of the space for content.
func (d *document) floor() float64 {
	_, h := d.pdf.GetPageSize()
	return h - marginBottom
}

func (d *document) room() float64 { return d.floor() - d.y }

// addPage begins a page with its head and foot.
func (d *document) addPage(landscape bool) {
	d.landscape = landscape
	orientation := "P"
	if landscape {
		orientation = "L"
	}
	d.pdf.AddPageFormat(orientation, gofpdf.SizeType{Wd: 210, Ht: 297})
	if d.running != "" {
		d.put(d.left(), 13, shorten(d.text.clean(d.running), d.width(), d.measure(caption)), caption)
		d.line(d.left(), 15, d.right(), 15, stroke{hairline, 0.2, false})
	}
	d.footer()
	d.y = marginTop
	if d.running == "" {
		d.y = 16
	}
}

// footer writes the title, the evidence and the page number. Only the title is shortened.
func (d *document) footer() {
	y := d.floor() + 9
	d.line(d.left(), y-4.5, d.right(), y-4.5, stroke{hairline, 0.2, false})
	tail := fmt.Sprintf("%s  ·  page %d of %d", d.mark, d.pdf.PageNo(), d.pages)
	d.putRight(d.right(), y, tail, caption)
	room := d.width() - d.widthOf(tail, caption) - 8
	d.put(d.left(), y, shorten(d.text.clean(d.title), room, d.measure(caption)), caption)
}

// need begins a new page of the same kind when less than h is left.
func (d *document) need(h float64) {
	if d.room() < h {
		d.addPage(d.landscape)
	}
}

func (d *document) space(h float64) { d.y += h }

func (d *document) setStyle(s style) {
	weight := ""
	if s.bold {
		weight = "B"
	}
	d.pdf.SetFont(fontFamily, weight, s.size)
	d.pdf.SetTextColor(s.ink.r, s.ink.g, s.ink.b)
}

// measure returns the function that gives the width of clean text in a style.
func (d *document) measure(s style) func(string) float64 {
	return func(t string) float64 {
		d.setStyle(s)
		return d.pdf.GetStringWidth(t)
	}
}

func (d *document) widthOf(t string, s style) float64 { return d.measure(s)(d.text.clean(t)) }

// put writes text with its baseline at y, beginning at x.
func (d *document) put(x, y float64, t string, s style) {
	d.setStyle(s)
	if t = d.text.clean(t); t != "" {
		d.pdf.Text(x, y, t)
	}
}

// putRight writes text that ends at x.
func (d *document) putRight(x, y float64, t string, s style) { d.put(x-d.widthOf(t, s), y, t, s) }

// putCentre writes text around x.
func (d *document) putCentre(x, y float64, t string, s style) { d.put(x-d.widthOf(t, s)/2, y, t, s) }

// wrap breaks text into lines of a width.
func (d *document) wrap(t string, s style, width float64) []string {
	return wrapText(d.text.clean(t), width, d.measure(s))
}

// paragraph writes text over the width of the page.
func (d *document) paragraph(t string, s style) { d.block(d.left(), d.width(), t, s) }

// block writes text in a column, over pages where needed, and moves on below it.
func (d *document) block(x, width float64, t string, s style) {
	lines := d.wrap(t, s, width)
	if len(lines) <= 3 {
		d.need(float64(len(lines)) * s.lineHeight())
	}
	for _, line := range lines {
		d.need(s.lineHeight())
		d.put(x, d.y+s.size*0.3528, line, s)
		d.y += s.lineHeight()
	}
}

// entry writes a term and its explanation side by side.
func (d *document) entry(term, explanation string, termWidth float64) {
	terms := d.wrap(term, bodyBold, termWidth-4)
	lines := d.wrap(explanation, body, d.width()-termWidth)
	d.need(float64(min(max(len(terms), len(lines)), 6)) * body.lineHeight())
	page, top := d.pdf.PageNo(), d.y
	for i, t := range terms {
		d.put(d.left(), top+body.size*0.3528+float64(i)*body.lineHeight(), t, bodyBold)
	}
	for _, line := range lines {
		d.need(body.lineHeight())
		d.put(d.left()+termWidth, d.y+body.size*0.3528, line, body)
		d.y += body.lineHeight()
	}
	if d.pdf.PageNo() == page {
		d.y = max(d.y, top+float64(len(terms))*body.lineHeight())
	}
	d.space(1.3)
}

// section begins a section: a large heading, an entry in the bookmarks, and the
// running head of the pages from here on.
func (d *document) section(title, running string, landscape bool) {
	d.running = ""
	d.addPage(landscape)
	d.running = running
	d.places[title] = d.pdf.PageNo()
	h := style{bold: true, size: 15, ink: navy}
	d.bookmark(title, 0)
	for _, line := range d.wrap(title, h, d.width()) {
		d.put(d.left(), d.y+h.size*0.3528, line, h)
		d.y += h.lineHeight()
	}
	d.space(2)
}

// heading begins a part of a section. keep is how much must follow on the same page.
func (d *document) heading(title string, keep float64) {
	h := style{bold: true, size: 11, ink: ink}
	d.need(h.lineHeight() + 4 + keep)
	if d.y > marginTop {
		d.space(3)
	}
	d.bookmark(title, 1)
	for _, line := range d.wrap(title, h, d.width()) {
		d.put(d.left(), d.y+h.size*0.3528, line, h)
		d.y += h.lineHeight()
	}
	d.space(1)
}

func (d *document) bookmark(title string, level int) {
	d.setStyle(body) // bookmarks are written in the encoding of the current font
	d.pdf.Bookmark(d.text.clean(title), level, d.y)
}
