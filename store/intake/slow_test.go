package intake

import (
	"fmt"
	"strings"
	"testing"
	"time"
)

func TestSlowPlan(t *testing.T) {
	n := 1 << 20
	var keys strings.Builder
	for i := 0; i < 19000; i++ {
		fmt.Fprintf(&keys, "k%d: 1\n", i)
	}
	var nest strings.Builder
	for i := 0; nest.Len() < n-3000; i++ {
		nest.WriteString(strings.Repeat(" ", i%1400) + "a:\n")
	}
	for name, s := range map[string]string{
		"keys":   keys.String(),
		"nest": nest.String(),
		"dash": strings.Repeat("-\n", 19999),
		"seqs": strings.Repeat("- a: 1\n  b: 2\n", 9999),
		"colon": strings.Repeat(": ", n/2),
		"flowmap": "{" + strings.Repeat("a: 1,", n/5-1) + "}",
		"flowmap2": "a: {" + strings.Repeat("a,", n/2-5) + "}",
		"quotes": "a: [" + strings.Repeat("'',", n/3-5) + "]",
		"dashflow": "a: " + strings.Repeat("- ", n/2-5),
		"minus": strings.Repeat("-", n),
		"pct": strings.Repeat("%", n),
		"star": strings.Repeat("* ", n/2),
		"comma": strings.Repeat(", ", n/2),
		"cr": strings.Repeat("-\r", n/2),
		"cr2": strings.Repeat("a: 1\r", n/5),
		"tabs": strings.Repeat("\t", n),
		"ac": strings.Repeat("a:\n# x\n", 9999),
	} {
		start := time.Now()
		_, err := ReadPlan("p", strings.NewReader(s))
		d := time.Since(start)
		msg := fmt.Sprint(err)
		t.Log(name, d, msg[:min(len(msg), 90)])
	}
}
