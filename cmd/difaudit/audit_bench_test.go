package main

import (
	"bytes"
	"encoding/csv"
	"errors"
	"io"
	"os"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"testing"
	"time"
)

// BenchmarkAuditFile measures an audit from file to evidence, a million candidates and a
// hundred items. x_csv is the time in units of a bare encoding/csv pass with ReuseRecord
// over the same file, run in turn, medians; peak_MB the largest resident memory while an
// audit ran (Linux).
func BenchmarkAuditFile(b *testing.B) {
	b.Run("1e6x100", func(b *testing.B) {
		dir := b.TempDir()
		var stdout, stderr bytes.Buffer
		env := environment{getenv: func(string) string { return "" }, stdout: &stdout, stderr: &stderr, now: time.Now}
		must := func(args ...string) {
			stdout.Reset()
			stderr.Reset()
			if status := run(b.Context(), args, env); status != statusDone {
				b.Fatalf("status %d: %s", status, stderr.String())
			}
		}
		must("simulate", "--out", dir, "--candidates", "700000:300000", "--items", "100", "--dif", "3:-1.5", "--seed", "3")
		file := filepath.Join(dir, "responses.csv")
		var ratios, seconds, peaks []float64
		for b.Loop() {
			for range 3 {
				start := time.Now()
				if rows := bareCSVPass(b, file); rows != 1_000_001 {
					b.Fatalf("%d rows", rows)
				}
				bare := time.Since(start).Seconds()
				_ = os.WriteFile("/proc/self/clear_refs", []byte("5"), 0) // forget the peak so far; only Linux has one
				start = time.Now()
				must("audit", "--responses", file, "--comparison", "group:reference:focal", "--evidence", filepath.Join(dir, "evidence.json"))
				took := time.Since(start).Seconds()
				ratios, seconds = append(ratios, took/bare), append(seconds, took)
				peaks = append(peaks, peakMegabytes())
			}
		}
		slices.Sort(ratios)
		slices.Sort(seconds)
		b.ReportMetric(ratios[len(ratios)/2], "x_csv")
		b.ReportMetric(seconds[len(seconds)/2], "s")
		b.ReportMetric(slices.Max(peaks), "peak_MB")
	})
}

func bareCSVPass(b *testing.B, path string) int {
	f, err := os.Open(path)
	if err != nil {
		b.Fatal(err)
	}
	defer f.Close()
	r := csv.NewReader(f)
	r.ReuseRecord = true
	for rows := 0; ; rows++ {
		if _, err := r.Read(); errors.Is(err, io.EOF) {
			return rows
		} else if err != nil {
			b.Fatal(err)
		}
	}
}

// peakMegabytes reads the largest resident memory of this process, 0 where it cannot.
func peakMegabytes() float64 {
	status, err := os.ReadFile("/proc/self/status")
	if err != nil {
		return 0
	}
	for line := range strings.Lines(string(status)) {
		if rest, ok := strings.CutPrefix(line, "VmHWM:"); ok {
			if kb, err := strconv.ParseFloat(strings.Fields(rest)[0], 64); err == nil {
				return kb / 1000
			}
		}
	}
	return 0
}
