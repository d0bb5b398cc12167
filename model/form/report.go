package form

import (
	"fmt"
	"reflect"
	"strings"
	"unicode/utf8"
)

// Report collects mistakes and knows where each key was written. Paths count
// sections that repeat: instrument[0].channel[2].range.
type Report struct {
	file     string
	noun     string
	root     reflect.Type
	nodes    map[string]*node
	mistakes Mistakes
}

// Err returns all mistakes found so far in the order of the file, or nil.
func (r *Report) Err() error {
	if len(r.mistakes) == 0 {
		return nil
	}
	r.mistakes.sort()
	return r.mistakes
}

// Has reports whether the file gives the key.
func (r *Report) Has(path string) bool { return r.nodes[path] != nil }

func (r *Report) add(at place, path, text string) {
	r.mistakes = append(r.mistakes, Mistake{r.file, at.line, at.column, display(path), text})
}

// Wrong says that the value under path does not do.
func (r *Report) Wrong(path, format string, args ...any) {
	n := r.nodes[path]
	if n == nil {
		r.About(path, format, args...)
		return
	}
	key := display(path)
	switch n.shape {
	case isText:
		key += fmt.Sprintf(" = %q", Clip(n.text))
	case isNumber, isWhole, isTruth, isDate:
		key += " = " + Clip(n.text)
	}
	r.add(n.value, path, key+": "+fmt.Sprintf(format, args...))
}

// Missing says that a key which is needed was not given.
func (r *Report) Missing(path, format string, args ...any) {
	r.add(r.near(path), path, display(path)+" is missing; "+fmt.Sprintf(format, args...))
}

// About says something of a key rather than of its value.
func (r *Report) About(path, format string, args ...any) {
	r.add(r.near(path), path, display(path)+" "+fmt.Sprintf(format, args...))
}

// Whole says something of the file.
func (r *Report) Whole(format string, args ...any) {
	r.add(place{}, "", fmt.Sprintf(format, args...))
}

// near is the place of the key, or of the nearest section around it.
func (r *Report) near(path string) place {
	for path != "" {
		if n := r.nodes[path]; n != nil {
			return n.key
		}
		path = path[:max(strings.LastIndexAny(path, ".["), 0)]
	}
	return place{}
}

// unknown refuses a key and says which one may have been meant, or where a
// key of that name belongs. It returns the key that was meant, or "".
func (r *Report) unknown(path, key string, n *node, known []string) (meant string) {
	within := display(strings.TrimSuffix(strings.TrimSuffix(path, key), "."))
	text := fmt.Sprintf("%s is not a key of [%s]", Clip(display(path)), within)
	if strings.Contains(path, "[") {
		text = fmt.Sprintf("%s is not a key of [[%s]]", Clip(display(path)), within)
	}
	if within == "" {
		text = fmt.Sprintf("%s is not a section of a %s", Clip(key), r.noun)
	}
	if meant = Nearest(key, known); meant != "" {
		text += fmt.Sprintf("; did you mean %q?", meant)
	} else if home := homeOf(key, r.root, ""); home != "" {
		text += fmt.Sprintf("; %s belongs to %s", key, home)
	}
	r.add(n.key, path, text)
	return meant
}

// homeOf returns the section that has the key, as its head is written.
func homeOf(key string, t reflect.Type, path string) string {
	for _, f := range fieldsOf(t) {
		kind, head := t.Field(f.index).Type, "[%s]"
		if kind.Kind() == reflect.Slice {
			kind, head = kind.Elem(), "[[%s]]"
		}
		if isSection(kind) {
			at := join(path, f.key)
			for _, k := range keysOf(kind) {
				if k == key {
					return fmt.Sprintf(head, at)
				}
			}
			if home := homeOf(key, kind, at); home != "" {
				return home
			}
		}
	}
	return ""
}

// display drops the counts of a path.
func display(path string) string {
	var b strings.Builder
	inside := false
	for _, c := range path {
		switch {
		case c == '[':
			inside = true
		case c == ']':
			inside = false
		case !inside:
			b.WriteRune(c)
		}
	}
	return b.String()
}

// Clip cuts a text that is quoted in a message to a readable length.
func Clip(s string) string {
	const most = 60
	if utf8.RuneCountInString(s) <= most {
		return s
	}
	return string([]rune(s)[:most]) + "…"
}
