package intake

import "fmt"

// planNode is a value of a plan file with its line: a scalar as it was written, a
// list or a mapping.
type planNode struct {
	line   int
	kind   nodeKind
	text   string
	list   []planNode
	fields []planField // in the order of the file, names unique
}

type planField struct {
	name  string
	line  int
	value planNode
}

type nodeKind byte

const (
	scalarNode nodeKind = iota
	nullNode
	listNode
	mappingNode
)

// Bounds of a plan, far above what plans need, so that reading one stays quick.
const (
	maxPlanDepth  = 20     // levels of nesting
	maxPlanSigns  = 40_000 // line ends, commas, colons, brackets and quotation marks of YAML
	maxPlanFields = 5_000  // entries of one mapping
)

// lineError is a fault of a plan with its line, 0 where it has none.
type lineError struct {
	line    int
	message string
}

func (e *lineError) Error() string { return e.message }

func atLine(line int, format string, args ...any) error {
	return &lineError{line, fmt.Sprintf(format, args...)}
}

// addField adds an entry to a mapping and refuses a name that is there.
func (n *planNode) addField(name string, line int, value planNode) error {
	if len(n.fields) == maxPlanFields {
		return atLine(line, "there are more than %d keys, which no plan has", maxPlanFields)
	}
	for _, f := range n.fields {
		if f.name == name {
			return atLine(line, "the key %s stands here and in line %d; keep one of them", shown(name), f.line)
		}
	}
	n.fields = append(n.fields, planField{name, line, value})
	return nil
}
