//go:build rendered

package reports

import (
	"bytes"
	"encoding/xml"
	"fmt"
	"image"
	"image/png"
	"io"
	"os"
	"path/filepath"
	"regexp"
	"strconv"
	"strings"
	"testing"

	"difaudit/dif"
)

// Every page says which evidence it shows and where it stands, however long the title.
func TestFootersAreWhole(t *testing.T) {
	t.Parallel()
	e := verbal(t, func(p *dif.Plan) { p.Title = strings.Repeat("A very long title ", 30) })
	pages := strings.Split(strings.TrimSuffix(command(t, "pdftotext", "-layout", save(t, pdf(t, e)), "-"), "\f"), "\f")
	for i, page := range pages {
		if want := fmt.Sprintf("evidence %s · page %d of %d", reportDigest[:12], i+1, len(pages)); !strings.Contains(oneLine(page), want) {
			t.Errorf("page %d lacks %q", i+1, want)
		}
	}
}

// A table of 30 items leaves no row or two on a page of its own.
func TestItemTablesLeaveNoRowAlone(t *testing.T) {
	t.Parallel()
	for _, n := range []int{28, 29, 30, 31, 32, 33} {
		e := audit(t, planFor("sex", "f", "m"), invented{numbered("Q", n), "sex", map[string]int{"f": 600, "m": 300}, nil, 0.3}.draw(21))
		tables := 0
		for i, page := range strings.Split(command(t, "pdftotext", "-layout", save(t, pdf(t, e)), "-"), "\f") {
			rows := len(regexp.MustCompile(`(?m)^ *[0-9]+ +Q[0-9]{3} +[0-9]`).FindAllString(page, -1))
			if rows > 0 {
				tables++
			}
			if rows == 1 || rows == 2 {
				t.Errorf("%d items: page %d holds %d of them", n, i+1, rows)
			}
		}
		if tables < 2 {
			t.Errorf("%d items: tables on %d pages only", n, tables)
		}
	}
}

// word is one word of a page as pdftotext sees it, in points.
type word struct {
	x0, y0, x1, y1 float64
	text           string
}

func pagesOfWords(t *testing.T, path string) (words [][]word, sizes [][2]float64) {
	t.Helper()
	d := xml.NewDecoder(strings.NewReader(command(t, "pdftotext", "-bbox", path, "-")))
	d.Strict = false
	number := func(e xml.StartElement, name string) float64 {
		for _, a := range e.Attr {
			if a.Name.Local == name {
				v, err := strconv.ParseFloat(a.Value, 64)
				if err != nil {
					t.Fatal(err)
				}
				return v
			}
		}
		t.Fatalf("%s has no %s", e.Name.Local, name)
		return 0
	}
	for {
		token, err := d.Token()
		if err == io.EOF {
			return words, sizes
		}
		if err != nil {
			t.Fatal(err)
		}
		switch e := token.(type) {
		case xml.StartElement:
			switch e.Name.Local {
			case "page":
				words, sizes = append(words, nil), append(sizes, [2]float64{number(e, "width"), number(e, "height")})
			case "word":
				w := word{number(e, "xMin"), number(e, "yMin"), number(e, "xMax"), number(e, "yMax"), ""}
				var text string
				if err := d.DecodeElement(&text, &e); err != nil {
					t.Fatal(err)
				}
				w.text = text
				words[len(words)-1] = append(words[len(words)-1], w)
			}
		}
	}
}

// Every page holds more than its head and foot, no word leaves the margins, and no two
// words lie on each other.
func TestPagesAreTidy(t *testing.T) {
	t.Parallel()
	for name, e := range cases(t) {
		path := save(t, pdf(t, e))
		words, sizes := pagesOfWords(t, path)
		for p, page := range words {
			const side, top, bottom = 17 * 72 / 25.4, 8 * 72 / 25.4, 7 * 72 / 25.4
			body := 0
			for _, w := range page {
				if w.x0 < side || w.x1 > sizes[p][0]-side || w.y0 < top || w.y1 > sizes[p][1]-bottom {
					t.Errorf("%s page %d: %q leaves the margins (%.0f %.0f %.0f %.0f)", name, p+1, w.text, w.x0, w.y0, w.x1, w.y1)
				}
				if w.y0 > 45 && w.y1 < sizes[p][1]-50 {
					body++
				}
			}
			if body < 5 {
				t.Errorf("%s page %d: blank", name, p+1)
			}
			for i, a := range page {
				for _, b := range page[i+1:] {
					// The boxes of lines reach into each other a little; ink does not.
					x, y := min(a.x1, b.x1)-max(a.x0, b.x0), min(a.y1, b.y1)-max(a.y0, b.y0)
					if x > 1 && y > 0.45*min(a.y1-a.y0, b.y1-b.y0) {
						t.Errorf("%s page %d: %q and %q overlap", name, p+1, a.text, b.text)
					}
				}
			}
		}
	}
}

// Nothing is drawn outside the margins.
func TestMarginsAreWhite(t *testing.T) {
	t.Parallel()
	for name, e := range cases(t) {
		path := save(t, pdf(t, e))
		dir := t.TempDir()
		command(t, "pdftoppm", "-r", "50", "-gray", "-png", path, filepath.Join(dir, "page"))
		files, err := filepath.Glob(filepath.Join(dir, "*.png"))
		if err != nil || len(files) == 0 {
			t.Fatal(name, err, len(files))
		}
		for _, file := range files {
			b, err := os.ReadFile(file)
			if err != nil {
				t.Fatal(err)
			}
			m, err := png.Decode(bytes.NewReader(b))
			if err != nil {
				t.Fatal(err)
			}
			const margin = 32 // 16.5 mm
			box := m.Bounds()
			for _, strip := range []image.Rectangle{
				image.Rect(box.Min.X, box.Min.Y, box.Min.X+margin, box.Max.Y), image.Rect(box.Max.X-margin, box.Min.Y, box.Max.X, box.Max.Y),
				image.Rect(box.Min.X, box.Min.Y, box.Max.X, box.Min.Y+15), image.Rect(box.Min.X, box.Max.Y-12, box.Max.X, box.Max.Y),
			} {
				if dark := darkPixels(m, strip); dark > 0 {
					t.Errorf("%s: %d dark pixels in the margin of %s", name, dark, filepath.Base(file))
				}
			}
		}
	}
}

func darkPixels(m image.Image, r image.Rectangle) int {
	n := 0
	for y := r.Min.Y; y < r.Max.Y; y++ {
		for x := r.Min.X; x < r.Max.X; x++ {
			if c, _, _, _ := m.At(x, y).RGBA(); c < 0xC000 {
				n++
			}
		}
	}
	return n
}
