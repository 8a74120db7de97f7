package intake

import (
	"bytes"
	"encoding/json"
	"errors"
	"fmt"
	"io"
)

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
