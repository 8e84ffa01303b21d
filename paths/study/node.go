package study

import (
	"strconv"
	"strings"
)

type nodeKind int

const (
	tableNode nodeKind = iota
	arrayNode
	textNode
	numberNode
	boolNode
	dateNode
	strayNode
)

func (k nodeKind) String() string {
	return [...]string{"a table", "a list", "a text", "a number", "true or false", "a date", "a number that is not finite"}[k]
}

// node is a value of the document with the place where it was written.
type node struct {
	kind      nodeKind
	line, col int
	field     string // dotted key
	text      string // a text without its quotes, anything else but tables and lists as typed
	number    float64
	whole     bool // the number was written as an integer

	keys   []key           // of a table, in the order written
	values map[string]*key // the same by name; nil if there are none
	items  []*node         // of a list

	source tableSource
}

// key is a key of a table with its place and value.
type key struct {
	name      string
	line, col int
	value     *node
}

// tableSource says how a table or list came into being, which decides who may
// still add to it.
type tableSource int

const (
	closedSource tableSource = iota // an inline table or list: complete
	headerSource                    // its own [header] or [[header]]
	pathSource                      // on the way to a longer header
	dottedSource                    // by a dotted key
)

// get returns the value under a key of a table, or nil; of no table there is
// none.
func (n *node) get(name string) *node {
	if n == nil {
		return nil
	}
	if k := n.values[name]; k != nil {
		return k.value
	}
	return nil
}

func (n *node) add(k key) *node {
	if n.values == nil {
		n.values = map[string]*key{}
	}
	n.keys = append(n.keys, k)
	n.values[k.name] = &k
	return k.value
}

// join appends a part to a dotted key.
func join(field, name string) string {
	if name == "" || strings.ContainsFunc(name, func(r rune) bool { return !bareKey(r) }) {
		name = strconv.Quote(name)
	}
	if field == "" {
		return name
	}
	return field + "." + name
}

func bareKey(r rune) bool {
	return r == '_' || r == '-' || '0' <= r && r <= '9' || 'a' <= r && r <= 'z' || 'A' <= r && r <= 'Z'
}
