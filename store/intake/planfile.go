package intake

import (
	"bytes"
	"errors"
	"fmt"
	"io"
	"strconv"
	"strings"

	"difaudit/dif"
)

// maxPlanBytes bounds the size of a plan file.
const maxPlanBytes = 1 << 20

// maxPlanFaults is how many faults of a plan are listed.
const maxPlanFaults = 50

// ReadPlan reads an audit plan in YAML or JSON. Keys that are absent have their
// defaults; unknown and repeated keys, anchors, aliases and tags are refused. A label
// or code is taken as it is written, so that no and 01 stay what they are. The error
// joins all faults, each with the name of the file and its line where it has one.
func ReadPlan(name string, r io.Reader) (dif.Plan, error) {
	content, err := io.ReadAll(io.LimitReader(r, maxPlanBytes+1))
	if err != nil {
		return dif.Plan{}, fmt.Errorf("read %s: %w", name, err)
	}
	if len(content) > maxPlanBytes {
		return dif.Plan{}, fmt.Errorf("%s: the plan is longer than 1 MiB, which no plan needs", name)
	}
	content = bytes.TrimPrefix(content, []byte("\xEF\xBB\xBF"))
	p := &planReader{plan: dif.DefaultPlan(), lines: map[string]int{}}
	var root planNode
	if inside, braced := bytes.CutPrefix(bytes.TrimSpace(content), []byte("{")); braced {
		root, err = parsePlanJSON(content)
		if err != nil { // braces start YAML as well
			flow, second := parsePlanYAML(content)
			if second == nil || !bytes.HasPrefix(bytes.TrimSpace(inside), []byte(`"`)) {
				root, err = flow, second
			}
		}
	} else {
		root, err = parsePlanYAML(content)
	}
	if err != nil {
		p.faults = append(p.faults, err)
	} else {
		p.read(&root)
	}
	if len(p.faults) == 0 {
		for _, fault := range p.plan.Validate() {
			p.faults = append(p.faults, &lineError{p.lineOf(fault.Error()), fault.Error()})
		}
	}
	if len(p.faults) == 0 {
		return p.plan, nil
	}
	var named []error
	for i, fault := range p.faults {
		if i == maxPlanFaults {
			named = append(named, fmt.Errorf("%s: and %s", name, plural(len(p.faults)-i, "more fault")))
			break
		}
		var at *lineError
		if errors.As(fault, &at) && at.line > 0 {
			named = append(named, fmt.Errorf("%s, line %d: %w", name, at.line, fault))
		} else {
			named = append(named, fmt.Errorf("%s: %w", name, fault))
		}
	}
	return dif.Plan{}, errors.Join(named...)
}

// planReader turns a tree into a plan and collects what is wrong with it.
type planReader struct {
	plan   dif.Plan
	faults []error
	lines  map[string]int // by path of a key, as Validate writes it
}

func (p *planReader) fault(line int, format string, args ...any) {
	p.faults = append(p.faults, atLine(line, format, args...))
}

// lineOf returns the line of the key a fault starts with, or of the nearest key above it.
func (p *planReader) lineOf(fault string) int {
	path, _, _ := strings.Cut(fault, ": ")
	for path != "" {
		if line, known := p.lines[path]; known {
			return line
		}
		path = path[:max(0, strings.LastIndexAny(path, ".["))]
	}
	return 0
}

// fields reads the entries of a mapping, each by the function of its name.
func (p *planReader) fields(n *planNode, path string, known map[string]func(n *planNode, path string)) {
	if n.kind != mappingNode {
		p.fault(n.line, "%s holds keys with values, one a line", orPlan(path))
		return
	}
	for i := range n.fields {
		f := &n.fields[i]
		at := f.name
		if path != "" {
			at = path + "." + f.name
		}
		p.lines[at] = f.line
		read, is := known[f.name]
		switch {
		case !is:
			p.fault(f.line, "%s has no key %s; it knows %s", orPlan(path), shown(f.name), strings.Join(sortedNames(known), ", "))
		case f.value.kind == nullNode:
			p.fault(f.line, "%s has no value; give one or remove the key", at)
		default:
			read(&f.value, at)
		}
	}
}

func orPlan(path string) string {
	if path == "" {
		return "the plan"
	}
	return path
}

// text reads a scalar as it was written.
func (p *planReader) text(to *string) func(*planNode, string) {
	return func(n *planNode, path string) {
		if n.kind != scalarNode {
			p.fault(n.line, "%s is a single value", path)
			return
		}
		*to = n.text
	}
}

// texts reads a list of scalars.
func (p *planReader) texts(to *[]string) func(*planNode, string) {
	return func(n *planNode, path string) {
		if n.kind != listNode {
			p.fault(n.line, "%s is a list; write [a, b]", path)
			return
		}
		*to = []string{}
		for _, v := range n.list {
			if v.kind != scalarNode {
				p.fault(v.line, "%s is a list of single values", path)
				return
			}
			*to = append(*to, v.text)
		}
	}
}

// parsed reads a scalar of another type.
func parsed[T any](p *planReader, to *T, what string, parse func(string) (T, error)) func(*planNode, string) {
	return func(n *planNode, path string) {
		v, err := parse(n.text)
		if n.kind != scalarNode || err != nil {
			p.fault(n.line, "%s is %s", path, what)
			return
		}
		*to = v
	}
}

func (p *planReader) number(to *float64) func(*planNode, string) {
	return parsed(p, to, "a number", func(s string) (float64, error) { return strconv.ParseFloat(s, 64) })
}

func (p *planReader) count(to *int) func(*planNode, string) {
	return parsed(p, to, "a whole number", strconv.Atoi)
}

func (p *planReader) truth(to *bool) func(*planNode, string) {
	return parsed(p, to, "true or false", func(s string) (bool, error) {
		if s != "true" && s != "false" {
			return false, strconv.ErrSyntax
		}
		return s == "true", nil
	})
}
