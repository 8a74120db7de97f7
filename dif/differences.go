package dif

import (
	"bytes"
	"cmp"
	"encoding/json"
	"fmt"
	"slices"
	"strconv"
)

// Differences compares two evidence documents value by value: numbers to a relative 1e-9,
// everything else exactly. It returns a sentence for each difference, at most limit of them,
// and their total number. Elements of lists are named by the item or comparison they are about.
func Differences(stored, recomputed []byte, limit int) (sentences []string, total int, err error) {
	a, err := tree(stored)
	if err != nil {
		return nil, 0, fmt.Errorf("read stored evidence: %w", err)
	}
	b, err := tree(recomputed)
	if err != nil {
		return nil, 0, fmt.Errorf("read recomputed evidence: %w", err)
	}
	d := differ{limit: limit}
	d.compare("", a, b)
	return d.sentences, d.total, nil
}

func tree(data []byte) (any, error) {
	dec := json.NewDecoder(bytes.NewReader(data))
	dec.UseNumber()
	var v any
	err := dec.Decode(&v)
	return v, err
}

type differ struct {
	limit, total int
	sentences    []string
}

func (d *differ) say(path, format string, args ...any) {
	d.total++
	if len(d.sentences) < d.limit {
		d.sentences = append(d.sentences, path+": "+fmt.Sprintf(format, args...))
	}
}

func (d *differ) compare(path string, a, b any) {
	switch x := a.(type) {
	case map[string]any:
		y, ok := b.(map[string]any)
		if !ok {
			d.say(path, "stored an object, recomputed %s", brief(b))
			return
		}
		keys := make([]string, 0, len(x))
		for k := range x {
			keys = append(keys, k)
		}
		for k := range y {
			if _, both := x[k]; !both {
				keys = append(keys, k)
			}
		}
		slices.SortFunc(keys, func(a, b string) int { return cmp.Or(cmp.Compare(rank(a), rank(b)), cmp.Compare(a, b)) })
		for _, k := range keys {
			u, inA := x[k]
			v, inB := y[k]
			at := k
			if path != "" {
				at = path + "." + k
			}
			switch {
			case !inA:
				d.say(at, "not stored, recomputed %s", brief(v))
			case !inB:
				d.say(at, "stored %s, not recomputed", brief(u))
			default:
				d.compare(at, u, v)
			}
		}
	case []any:
		y, ok := b.([]any)
		if !ok || len(x) != len(y) {
			d.say(path, "stored a list of %d, recomputed %s", len(x), brief(b))
			return
		}
		for i := range x {
			d.compare(fmt.Sprintf("%s[%s]", path, elementName(x[i], i)), x[i], y[i])
		}
	case json.Number:
		y, ok := b.(json.Number)
		if ok {
			u, errU := strconv.ParseFloat(x.String(), 64)
			v, errV := strconv.ParseFloat(y.String(), 64)
			ok = errU == nil && errV == nil && agree(&u, &v)
		}
		if !ok {
			d.say(path, "stored %s, recomputed %s", x, brief(b))
		}
	default:
		if a != b {
			d.say(path, "stored %s, recomputed %s", brief(a), brief(b))
		}
	}
}

// rank puts causes before their effects: engine, inputs and plan before results.
func rank(key string) int {
	if i := slices.Index([]string{"schema", "engine", "inputs", "plan"}, key); i >= 0 {
		return i
	}
	return 4
}

// elementName names an element of a list by what it is about, or by its place from 1.
func elementName(v any, i int) string {
	if m, ok := v.(map[string]any); ok {
		for _, key := range []string{"item", "kind", "code", "reason"} {
			if s, ok := m[key].(string); ok {
				return s
			}
		}
	}
	return strconv.Itoa(i + 1)
}

func brief(v any) string {
	switch x := v.(type) {
	case map[string]any:
		return "an object"
	case []any:
		return fmt.Sprintf("a list of %d", len(x))
	case nil:
		return "null"
	case string:
		return strconv.Quote(x)
	}
	return fmt.Sprint(v)
}
