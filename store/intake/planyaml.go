package intake

import (
	"bytes"
	"errors"
	"io"

	"github.com/goccy/go-yaml"
	"github.com/goccy/go-yaml/ast"
	"github.com/goccy/go-yaml/parser"
	"github.com/goccy/go-yaml/scanner"
	"github.com/goccy/go-yaml/token"
)

// parsePlanYAML returns the tree of a YAML document.
func parsePlanYAML(content []byte) (node planNode, err error) {
	if n := signs(content); n > maxPlanSigns {
		return node, atLine(0, "the plan has %d line ends and signs such as commas, colons and brackets, and %d is the limit", n, maxPlanSigns)
	}
	defer func() {
		if recover() != nil {
			err = atLine(0, "the plan cannot be read as YAML")
		}
	}()
	tokens, err := tokenize(content)
	if err != nil {
		return node, err
	}
	file, err := parser.Parse(tokens, 0, parser.AllowDuplicateMapKey())
	if err != nil {
		var at yaml.Error
		if errors.As(err, &at) && at.GetToken() != nil && at.GetToken().Position != nil {
			return node, atLine(at.GetToken().Position.Line, "the plan is not valid YAML: %s", shown(at.GetMessage()))
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

// tokenize returns the tokens of a YAML text. It stops where they nest too deep, by
// the brackets that are open and the dashes and question marks in a row.
// Brackets within quotation marks, plain text and comments are no tokens.
func tokenize(content []byte) (token.Tokens, error) {
	var source scanner.Scanner
	source.Init(string(content))
	var tokens token.Tokens
	brackets, starts, line := 0, 0, 0
	for {
		some, err := source.Scan()
		if errors.Is(err, io.EOF) {
			return tokens, nil
		}
		for _, t := range some {
			if t.Position.Line != line {
				line, starts = t.Position.Line, 0
			}
			switch t.Type {
			case token.SequenceStartType, token.MappingStartType:
				brackets++
			case token.SequenceEndType, token.MappingEndType:
				brackets = max(0, brackets-1)
			case token.SequenceEntryType, token.MappingKeyType:
				starts++
			case token.CollectEntryType:
				starts = 0
			}
			if brackets+starts > maxPlanDepth {
				return nil, atLine(line, "the plan nests deeper than %d levels", maxPlanDepth)
			}
		}
		if tokens.Add(some...); err != nil {
			return tokens, nil // the last token stands for what is no YAML; the parser reports it
		}
	}
}

// signs counts the line ends and the characters that can separate the parts of a YAML text.
func signs(content []byte) int {
	n := bytes.Count(content, []byte("- ")) - bytes.Count(content, []byte("\r\n"))
	for _, c := range content {
		switch c {
		case '\n', '\r', ',', ':', '[', ']', '{', '}', '?', '&', '*', '"', '\'':
			n++
		}
	}
	return n
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
