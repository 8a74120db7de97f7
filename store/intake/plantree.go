package intake

import (
	"bytes"
	"encoding/json"
	"errors"
	"fmt"
	"io"

	"github.com/goccy/go-yaml"
	"github.com/goccy/go-yaml/ast"
	"github.com/goccy/go-yaml/parser"
)

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
	maxPlanLines  = 20_000 // of YAML
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

// parsePlanYAML returns the tree of a YAML document.
func parsePlanYAML(content []byte) (node planNode, err error) {
	if line, deep := deepest(content); deep > maxPlanDepth {
		return node, atLine(line, "the plan nests deeper than %d levels", maxPlanDepth)
	}
	if lines := bytes.Count(content, []byte("\n")); lines > maxPlanLines {
		return node, atLine(maxPlanLines, "the plan has %d lines; %d is the limit. Write long lists as [a, b, ...]", lines, maxPlanLines)
	}
	defer func() {
		if recover() != nil {
			err = atLine(0, "the plan cannot be read as YAML")
		}
	}()
	file, err := parser.ParseBytes(content, 0, parser.AllowDuplicateMapKey())
	if err != nil {
		var at yaml.Error
		if errors.As(err, &at) && at.GetToken() != nil && at.GetToken().Position != nil {
			return node, atLine(at.GetToken().Position.Line, "the plan is not valid YAML: %s", at.GetMessage())
		}
		return node, atLine(0, "the plan is not valid YAML")
	}
	var body ast.Node
	for _, doc := range file.Docs {
		switch {
		case doc.Body == nil:
		case body != nil:
			return node, atLine(doc.Body.GetToken().Position.Line, "a second document starts here; a plan file holds one plan")
		default:
			body = doc.Body
		}
	}
	if body == nil {
		return node, atLine(0, "the plan is empty; it needs at least comparisons")
	}
	return fromYAML(body, 0)
}

// deepest returns the line of the deepest nesting and its depth: by brackets, without
// regard to quotation marks, and by the dashes, question marks and colons that start a line.
func deepest(content []byte) (line, depth int) {
	brackets := 0
	for n, text := range bytes.Split(content, []byte("\n")) {
		starts, starting := 0, true
		for _, c := range text {
			switch c {
			case '[', '{':
				brackets++
			case ']', '}':
				brackets = max(0, brackets-1)
			case '-', '?', ':':
				if starting {
					starts++
				}
			}
			starting = starting && (c == ' ' || c == '-' || c == '?' || c == ':')
			if brackets+starts/2 > depth {
				line, depth = n+1, brackets+starts/2
			}
		}
	}
	return line, depth
}

func fromYAML(n ast.Node, depth int) (planNode, error) {
	if n == nil || n.GetToken() == nil || n.GetToken().Position == nil {
		return planNode{kind: nullNode}, nil
	}
	node := planNode{line: n.GetToken().Position.Line, text: n.GetToken().Value}
	if depth > maxPlanDepth {
		return node, atLine(node.line, "the plan nests deeper than %d levels", maxPlanDepth)
	}
	switch n := n.(type) {
	case *ast.StringNode:
		node.text = n.Value
	case *ast.LiteralNode:
		node.text = n.Value.Value
	case *ast.IntegerNode, *ast.FloatNode, *ast.BoolNode, *ast.InfinityNode, *ast.NanNode:
	case *ast.NullNode:
		node.kind = nullNode
	case *ast.SequenceNode:
		node.kind = listNode
		for _, v := range n.Values {
			child, err := fromYAML(v, depth+1)
			if err != nil {
				return node, err
			}
			if child.line == 0 {
				child.line = node.line
			}
			node.list = append(node.list, child)
		}
	case *ast.MappingNode:
		node.kind = mappingNode
		for _, v := range n.Values {
			if err := node.addYAML(v, depth); err != nil {
				return node, err
			}
		}
	case *ast.MappingValueNode:
		node.kind = mappingNode
		if err := node.addYAML(n, depth); err != nil {
			return node, err
		}
	case *ast.AnchorNode, *ast.AliasNode:
		return node, atLine(node.line, "anchors and aliases (& and *) are not used in plans; write the value out, or in quotation marks")
	case *ast.TagNode:
		return node, atLine(node.line, "tags (!) are not used in plans; write the value in quotation marks")
	default:
		return node, atLine(node.line, "this kind of YAML value is not used in plans")
	}
	return node, nil
}

// addYAML adds one entry of a mapping.
func (n *planNode) addYAML(v *ast.MappingValueNode, depth int) error {
	var name string
	switch key := v.Key.(type) {
	case *ast.StringNode:
		name = key.Value
	case *ast.IntegerNode, *ast.FloatNode, *ast.BoolNode, *ast.NullNode:
		name = key.GetToken().Value
	default:
		return atLine(n.line, "a key of a plan is a plain name")
	}
	line := v.Key.GetToken().Position.Line
	value, err := fromYAML(v.Value, depth+1)
	if err != nil {
		return err
	}
	if value.line == 0 {
		value.line = line
	}
	return n.addField(name, line, value)
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

// parsePlanJSON returns the tree of a JSON document.
func parsePlanJSON(content []byte) (planNode, error) {
	d := json.NewDecoder(bytes.NewReader(content))
	d.UseNumber()
	p := jsonTree{d, content}
	node, err := p.value(0)
	if err == nil {
		if _, more := d.Token(); more != io.EOF {
			return node, atLine(p.line(), "something follows the plan; a plan file holds one plan")
		}
		return node, nil
	}
	var known *lineError
	if errors.As(err, &known) {
		return node, err
	}
	return node, atLine(p.line(), "the plan is not valid JSON: %v", err)
}

type jsonTree struct {
	d       *json.Decoder
	content []byte
}

// line returns the line that has been read up to.
func (p *jsonTree) line() int {
	return 1 + bytes.Count(p.content[:min(p.d.InputOffset(), int64(len(p.content)))], []byte("\n"))
}

func (p *jsonTree) value(depth int) (planNode, error) {
	token, err := p.d.Token()
	node := planNode{line: p.line()}
	if err == io.EOF {
		err = io.ErrUnexpectedEOF
	}
	if err != nil {
		return node, err
	}
	if depth > maxPlanDepth {
		return node, atLine(node.line, "the plan nests deeper than %d levels", maxPlanDepth)
	}
	switch token := token.(type) {
	case nil:
		node.kind = nullNode
	case string:
		node.text = token
	case json.Number:
		node.text = token.String()
	case bool:
		node.text = fmt.Sprint(token)
	case json.Delim:
		if token == '[' {
			node.kind = listNode
			for p.d.More() {
				child, err := p.value(depth + 1)
				if err != nil {
					return node, err
				}
				node.list = append(node.list, child)
			}
		} else {
			node.kind = mappingNode
			for p.d.More() {
				key, err := p.d.Token()
				if err != nil {
					return node, err
				}
				line := p.line()
				value, err := p.value(depth + 1)
				if err != nil {
					return node, err
				}
				name, _ := key.(string)
				if err := node.addField(name, line, value); err != nil {
					return node, err
				}
			}
		}
		if _, err := p.d.Token(); err != nil { // the closing bracket
			return node, err
		}
	}
	return node, nil
}
