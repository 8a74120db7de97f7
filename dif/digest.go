package dif

import (
	"bufio"
	"crypto/sha256"
	"encoding/binary"
	"encoding/hex"
	"hash"
	"math"
	"slices"
	"strings"
)

// Digest returns the SHA-256 of the canonical data: item descriptions, forms with
// their keys, the named groupings, and every candidate record in order with
// identifier, attempt, form, external score, labels and answer codes. The same answers
// give the same digest whatever file shape they came in.
func (d *Data) Digest(groupings []string) string {
	h := sha256.New()
	w := digestWriter{w: bufio.NewWriterSize(h, 1<<16)}
	w.text("difaudit/data/1")
	w.number(len(d.Items))
	for _, it := range d.Items {
		w.text(it.ID, it.Version, it.Role)
		w.number(it.MaxScore)
		w.texts(it.Options)
		w.texts(it.Key)
		w.flag(it.KeyMissing)
	}
	w.number(len(d.Forms))
	for _, f := range d.Forms {
		w.text(f.ID)
		w.number(len(f.Items))
		for _, fi := range f.Items {
			w.number(fi.Item)
			w.number(fi.Position)
			w.texts(fi.Key)
			w.texts(fi.OptionOrder)
		}
	}
	var used []Grouping
	for _, g := range d.Groupings {
		if slices.Contains(groupings, g.Name) {
			used = append(used, g)
		}
	}
	slices.SortFunc(used, func(a, b Grouping) int { return strings.Compare(a.Name, b.Name) })
	w.number(len(used))
	for _, g := range used {
		w.text(g.Name)
	}
	w.flag(d.Attempt != nil)
	w.flag(d.FormOf != nil)
	w.flag(d.External != nil)
	w.number(d.Candidates())
	for c := range d.Candidates() {
		w.bytes(d.IDs.At(c))
		if d.Attempt != nil {
			w.number(int(d.Attempt[c]))
		}
		if d.FormOf != nil {
			w.number(int(d.FormOf[c]))
		}
		if d.External != nil {
			x := d.External[c]
			if math.IsNaN(x) {
				w.flag(false)
			} else {
				w.flag(true)
				w.number(int(math.Float64bits(x + 0))) // + 0: both zeros are one
			}
		}
		for _, g := range used {
			if code := g.Codes[c]; code > 0 {
				w.text(g.Labels[code-1])
			} else {
				w.text("")
			}
		}
		_, _ = w.w.Write(d.Answers.Row(c)) // a hash takes every write
	}
	return w.sum(h)
}

// digestWriter writes values so that no two sequences of values give the same bytes.
type digestWriter struct {
	w       *bufio.Writer
	scratch [binary.MaxVarintLen64]byte
}

func (d *digestWriter) number(n int) {
	_, _ = d.w.Write(binary.AppendVarint(d.scratch[:0], int64(n)))
}

func (d *digestWriter) bytes(b []byte) {
	d.number(len(b))
	_, _ = d.w.Write(b)
}

func (d *digestWriter) text(values ...string) {
	for _, s := range values {
		d.number(len(s))
		_, _ = d.w.WriteString(s)
	}
}

func (d *digestWriter) texts(values []string) {
	if values == nil {
		d.number(-1)
		return
	}
	d.number(len(values))
	d.text(values...)
}

func (d *digestWriter) flag(on bool) {
	b := byte(0)
	if on {
		b = 1
	}
	_ = d.w.WriteByte(b)
}

func (d *digestWriter) sum(h hash.Hash) string {
	_ = d.w.Flush()
	return hex.EncodeToString(h.Sum(nil))
}
