// Package reports shows evidence: a PDF for a director's file, a CSV and a plain-text
// table of findings.
//
// Nothing is decided here. Letters, reasons, warnings and counts stand in the
// evidence; this package words, draws and lays them out, and keeps back what could
// single out candidates (see privacy.go and expose.go). It reads no clock and no network,
// and equal input gives equal bytes.
package reports
