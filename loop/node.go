package loop

import (
	"errors"
	"fmt"
	"strings"

	"github.com/goccy/go-yaml"
	"github.com/goccy/go-yaml/ast"
	"github.com/goccy/go-yaml/parser"
	"github.com/goccy/go-yaml/token"
)

// nodeKind is the sort of a value of the file.
type nodeKind int

const (
	emptyNode nodeKind = iota // nothing after the key, null or ~
	textNode
	mapNode
	listNode
)

func (k nodeKind) String() string {
	return [...]string{"nothing", "a single value", "a mapping", "a list"}[k]
}

// node is a value of the file. All single values are text: the readers decide what the
// text means, so that no number passes through a float.
type node struct {
	kind    nodeKind
	at      place
	text    string
	start   place // of the first character of text, when exact
	exact   bool  // text stands in the source from start on, character by character
	broken  bool  // reported already: readers stay quiet about it
	partial bool  // of a mapping: some keys were refused and reported
	entries []entry
	items   []*node
}

// entry is a key with its value.
type entry struct {
	key   string
	at    place
	value *node
}

// yamlTree reads the YAML text. It reports what is not plain YAML: anchors, aliases,
// merge keys, tags, directives, several documents, duplicate keys. nil: reported.
func yamlTree(r *reader, text string) *node {
	file := parseYAML(r, text)
	if file == nil {
		return nil
	}
	c := converter{r}
	var body ast.Node
	for _, d := range file.Docs {
		if d.Body == nil {
			continue
		}
		if d.Body.Type() == ast.DirectiveType {
			r.report(c.place(d.Body.GetToken()), "YAML directives are not used here", "")
			return nil
		}
		if body != nil {
			r.report(c.place(d.Body.GetToken()), "a second YAML document", "one loop in one file")
			return nil
		}
		body = d.Body
	}
	if body == nil {
		r.report(place{}, "the file holds no loop", "keys such as plant, controller and timing")
		return nil
	}
	return c.convert(body, 0)
}

// parseYAML calls the library. Should it panic on some text, that is a plain message too.
func parseYAML(r *reader, text string) (file *ast.File) {
	defer func() {
		if recover() != nil {
			r.report(place{}, "this is not YAML that can be read", "")
			file = nil
		}
	}()
	file, err := parser.ParseBytes([]byte(text), 0, parser.AllowDuplicateMapKey())
	if err == nil {
		return file
	}
	var syntax *yaml.SyntaxError
	if errors.As(err, &syntax) && strings.Contains(syntax.Message, "\t") {
		r.report(converter{r}.place(syntax.Token), "a tab where YAML needs spaces", "spaces as indentation")
	} else if errors.As(err, &syntax) {
		r.report(converter{r}.place(syntax.Token), "not YAML: "+syntax.Message,
			"keys of one section under each other, brackets closed, text that holds \": \" or \" #\" in quotes")
	} else {
		r.report(place{}, "not YAML: "+err.Error(), "")
	}
	return nil
}

type converter struct{ r *reader }

// place is where a token stands; outside the file it becomes the file's last place.
func (c converter) place(t *token.Token) place {
	if t == nil || t.Position == nil {
		return place{}
	}
	return c.r.clamp(place{t.Position.Line, t.Position.Column})
}

func (c converter) refuse(t *token.Token, message, expected string) *node {
	c.r.report(c.place(t), message, expected)
	return nil
}

// convert returns nil for what it reported.
func (c converter) convert(n ast.Node, depth int) *node {
	if n == nil {
		return &node{}
	}
	t := n.GetToken()
	if depth > maxNest {
		return c.refuse(t, fmt.Sprintf("nested more than %d deep", maxNest), "")
	}
	switch v := n.(type) {
	case *ast.NullNode:
		return &node{at: c.place(t)}
	case *ast.MappingNode:
		return c.mapping(v.Values, t, depth)
	case *ast.MappingValueNode:
		return c.mapping([]*ast.MappingValueNode{v}, t, depth)
	case *ast.SequenceNode:
		out := &node{kind: listNode, at: c.place(t)}
		for _, item := range v.Values {
			if x := c.convert(item, depth+1); x != nil {
				out.items = append(out.items, x)
			}
		}
		return out
	case *ast.AnchorNode, *ast.AliasNode:
		return c.refuse(t, "anchors and aliases (& and *) are not used here", "the value itself; for a shared number, a symbol")
	case *ast.TagNode:
		return c.refuse(t, "tags (!) are not used here", "the value itself")
	case *ast.LiteralNode:
		return &node{kind: textNode, at: c.place(t), text: strings.TrimSpace(v.Value.Value)}
	case ast.ScalarNode:
		return c.scalar(t)
	}
	return c.refuse(t, "this kind of YAML is not used here", "")
}

// scalar keeps the text as written. Its characters are found in the source when it
// stands on one line without escapes.
func (c converter) scalar(t *token.Token) *node {
	out := &node{kind: textNode, at: c.place(t), text: t.Value}
	start := out.at
	if t.Type == token.SingleQuoteType || t.Type == token.DoubleQuoteType {
		start.column++
	}
	out.exact = c.r.stands(out.text, start)
	out.start = start
	return out
}

func (c converter) mapping(values []*ast.MappingValueNode, t *token.Token, depth int) *node {
	out := &node{kind: mapNode, at: c.place(t)}
	seen := map[string]place{}
	for i, v := range values {
		if v == nil || v.Key == nil {
			continue
		}
		kt := v.Key.GetToken()
		at := c.place(kt)
		if i == 0 && t.Type == token.MappingValueType {
			out.at = at
		}
		key, ok := c.key(v.Key)
		if !ok {
			out.partial = true
			continue
		}
		if first, ok := seen[key]; ok {
			c.r.report(at, fmt.Sprintf("%s stands here a second time", quote(key)),
				fmt.Sprintf("one %s; the first is on line %d", key, first.line))
			continue
		}
		seen[key] = at
		value := c.convert(v.Value, depth+1)
		if value == nil {
			value = &node{broken: true}
		}
		out.entries = append(out.entries, entry{key, at, value})
	}
	return out
}

// key is the text of a key; anything but a plain or quoted word is refused.
func (c converter) key(k ast.MapKeyNode) (string, bool) {
	t := k.GetToken()
	switch k.(type) {
	case *ast.MergeKeyNode:
		c.refuse(t, "merge keys (<<) are not used here", "the keys themselves")
		return "", false
	case *ast.StringNode, *ast.IntegerNode, *ast.FloatNode, *ast.BoolNode, *ast.NullNode, *ast.InfinityNode, *ast.NanNode:
		return t.Value, true
	}
	c.refuse(t, "this is not a plain key", "a word before the colon")
	return "", false
}
