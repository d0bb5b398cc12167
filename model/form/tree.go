package form

import (
	"bytes"
	"fmt"
	"unicode/utf8"

	"github.com/pelletier/go-toml/v2/unstable"
)

// place is where something was written; the zero place is nowhere.
type place struct{ line, column int }

// shape is what a node of the tree is.
type shape uint8

const (
	isTable shape = iota
	isList
	isText
	isNumber
	isWhole
	isTruth
	isDate
)

var shapeText = [...]string{"a section", "a list", "text", "a number", "a whole number", "true or false", "a date"}

// node is a value of the file that knows where it was written.
type node struct {
	shape shape
	key   place // of the key that names it, or of the section's head
	value place
	text  string           // of a scalar, unquoted
	keys  []string         // of a table, in the order of the file
	table map[string]*node // of a table
	items []*node          // of a list
}

func newTable(at place) *node {
	return &node{shape: isTable, key: at, value: at, table: map[string]*node{}}
}

func (n *node) put(key string, child *node) {
	if _, there := n.table[key]; !there {
		n.keys = append(n.keys, key)
	}
	n.table[key] = child
}

// find returns the node under the keys, or nil.
func (n *node) find(keys ...string) *node {
	for _, k := range keys {
		if n == nil || n.shape != isTable {
			return nil
		}
		n = n.table[k]
	}
	return n
}

// layout builds the tree of a file whose syntax is already proved.
type layout struct {
	data   []byte
	lines  []int // offset of the first byte of each line
	parser unstable.Parser
}

// grow lays data out as a tree.
func grow(data []byte) (*node, error) {
	l := &layout{data: data, lines: []int{0}}
	for i, b := range data {
		if b == '\n' {
			l.lines = append(l.lines, i+1)
		}
	}
	root := newTable(place{})
	current := root
	l.parser.Reset(data)
	for l.parser.NextExpression() {
		e := l.parser.Expression()
		var err error
		switch e.Kind {
		case unstable.Table, unstable.ArrayTable:
			current, err = l.section(root, e)
		case unstable.KeyValue:
			err = l.keyValue(current, e)
		}
		if err != nil {
			return nil, err
		}
	}
	return root, l.parser.Error()
}

// at returns the place of the byte at offset.
func (l *layout) at(offset uint32) place {
	low, high := 0, len(l.lines)
	for high-low > 1 {
		if mid := (low + high) / 2; l.lines[mid] <= int(offset) {
			low = mid
		} else {
			high = mid
		}
	}
	return place{low + 1, utf8.RuneCount(l.data[l.lines[low]:offset]) + 1}
}

// section returns the table that a head such as [fibre] or [[instrument]]
// opens.
func (l *layout) section(root *node, e *unstable.Node) (*node, error) {
	table := root
	for it := e.Key(); it.Next(); {
		k := it.Node()
		at, key := l.at(k.Raw.Offset), string(k.Data)
		next := table.table[key]
		last := it.IsLast()
		switch {
		case last && e.Kind == unstable.ArrayTable:
			if next == nil {
				next = &node{shape: isList, key: at, value: at}
				table.put(key, next)
			}
			if next.shape != isList {
				return nil, fmt.Errorf("line %d: %q is %s already, not a list", at.line, key, shapeText[next.shape])
			}
			next.items = append(next.items, newTable(at))
		case next == nil:
			next = newTable(at)
			table.put(key, next)
		case last && next.shape == isTable:
			next.key, next.value = at, at // opened before by a section below it
		}
		if next.shape == isList && len(next.items) > 0 {
			next = next.items[len(next.items)-1]
		}
		if next.shape != isTable {
			return nil, fmt.Errorf("line %d: %q is %s already, not a section", at.line, key, shapeText[next.shape])
		}
		table = next
	}
	return table, nil
}

// keyValue puts a key and its value into table.
func (l *layout) keyValue(table *node, e *unstable.Node) error {
	var at place
	var key string
	end := e.Raw.Offset
	for it := e.Key(); it.Next(); {
		k := it.Node()
		at, key = l.at(k.Raw.Offset), string(k.Data)
		end = k.Raw.Offset + k.Raw.Length
		if it.IsLast() {
			break
		}
		next := table.table[key]
		if next == nil {
			next = newTable(at)
			table.put(key, next)
		}
		if next.shape != isTable {
			return fmt.Errorf("line %d: %q is %s already, not a section", at.line, key, shapeText[next.shape])
		}
		table = next
	}
	// Lists carry no place of their own: theirs is the first byte behind the
	// equals sign.
	start := end
	for int(start) < len(l.data) && bytes.IndexByte([]byte(" \t="), l.data[start]) >= 0 {
		start++
	}
	child, err := l.value(e.Value(), l.at(start))
	if err != nil {
		return err
	}
	child.key = at
	table.put(key, child)
	return nil
}

// value lays out a value; at is where it starts if it does not know itself.
func (l *layout) value(v *unstable.Node, at place) (*node, error) {
	if v.Raw.Length > 0 {
		at = l.at(v.Raw.Offset)
	}
	n := &node{key: at, value: at, text: string(v.Data)}
	switch v.Kind {
	case unstable.Array:
		n.shape = isList
		for it := v.Children(); it.Next(); {
			item, err := l.value(it.Node(), at)
			if err != nil {
				return nil, err
			}
			n.items = append(n.items, item)
		}
	case unstable.InlineTable:
		n.shape, n.table = isTable, map[string]*node{}
		for it := v.Children(); it.Next(); {
			if err := l.keyValue(n, it.Node()); err != nil {
				return nil, err
			}
		}
	case unstable.String:
		n.shape = isText
	case unstable.Integer:
		n.shape = isWhole
	case unstable.Float:
		n.shape = isNumber
	case unstable.Bool:
		n.shape = isTruth
	default:
		n.shape = isDate
	}
	return n, nil
}
