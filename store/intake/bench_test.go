package intake

import (
	"bytes"
	"encoding/csv"
	"fmt"
	"io"
	"math/rand/v2"
	"slices"
	"testing"
	"time"

	"difaudit/dif"
)

// wideFile writes a wide file of scored answers with one grouping.
func wideFile(w io.Writer, candidates, items int) {
	rng := rand.New(rand.NewPCG(1, 2))
	var b bytes.Buffer
	b.WriteString("candidate_id,sex")
	for i := range items {
		fmt.Fprintf(&b, ",Q%03d", i+1)
	}
	b.WriteByte('\n')
	for c := range candidates {
		fmt.Fprintf(&b, "C%08d,%c", (c*7919)%candidates, "mf"[rng.IntN(2)])
		bits := rng.Uint64()
		for i := range items {
			if i%64 == 0 {
				bits = rng.Uint64()
			}
			b.WriteByte(',')
			b.WriteByte('0' + byte(bits>>(i%64)&1))
		}
		b.WriteByte('\n')
		if b.Len() > 1<<20 {
			w.Write(b.Bytes())
			b.Reset()
		}
	}
	w.Write(b.Bytes())
}

func sexPlan() dif.Plan {
	p := dif.DefaultPlan()
	p.Comparisons = []dif.PlannedComparison{{Grouping: "sex", Reference: "m", Focal: "f"}}
	return p
}

// barePass is the baseline: the standard CSV reader over the same bytes.
func barePass(content []byte) error {
	r := csv.NewReader(bytes.NewReader(content))
	r.ReuseRecord = true
	for {
		if _, err := r.Read(); err == io.EOF {
			return nil
		} else if err != nil {
			return err
		}
	}
}

// BenchmarkReadWide reports x_csv, the time of Read over that of a bare pass of the
// standard CSV reader, alternating in the same process, as the median of the rounds.
func BenchmarkReadWide(b *testing.B) {
	b.Run("100000x100", func(b *testing.B) {
		var content bytes.Buffer
		wideFile(&content, 100_000, 100)
		var ratios []float64
		for b.Loop() {
			start := time.Now()
			if err := barePass(content.Bytes()); err != nil {
				b.Fatal(err)
			}
			bare := time.Since(start)
			start = time.Now()
			file := &File{"responses.csv", bytes.NewReader(content.Bytes())}
			if _, err := Read(b.Context(), Request{Responses: file, Plan: sexPlan()}); err != nil {
				b.Fatal(err)
			}
			ratios = append(ratios, time.Since(start).Seconds()/bare.Seconds())
		}
		slices.Sort(ratios)
		b.ReportMetric(ratios[len(ratios)/2], "x_csv")
	})
}
