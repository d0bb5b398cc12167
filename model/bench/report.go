package bench

import (
	"fmt"
	"reflect"
	"strings"
	"unicode/utf8"
)

// report collects mistakes and knows where each key was written. Paths count
// sections that repeat: instrument[0].channel[2].range.
type report struct {
	file     string
	nodes    map[string]*node
	mistakes Mistakes
}

// has reports whether the file gives the key.
func (r *report) has(path string) bool { return r.nodes[path] != nil }

func (r *report) add(at place, path, text string) {
	r.mistakes = append(r.mistakes, Mistake{r.file, at.line, at.column, display(path), text})
}

// wrong says that the value under path does not do.
func (r *report) wrong(path, format string, args ...any) {
	n := r.nodes[path]
	if n == nil {
		r.about(path, format, args...)
		return
	}
	key := display(path)
	switch n.shape {
	case isText:
		key += fmt.Sprintf(" = %q", clip(n.text))
	case isNumber, isWhole, isTruth, isDate:
		key += " = " + clip(n.text)
	}
	r.add(n.value, path, key+": "+fmt.Sprintf(format, args...))
}

// missing says that a key which is needed was not given.
func (r *report) missing(path, format string, args ...any) {
	r.add(r.near(path), path, display(path)+" is missing; "+fmt.Sprintf(format, args...))
}

// about says something of a key rather than of its value.
func (r *report) about(path, format string, args ...any) {
	r.add(r.near(path), path, display(path)+" "+fmt.Sprintf(format, args...))
}

// whole says something of the file.
func (r *report) whole(format string, args ...any) {
	r.add(place{}, "", fmt.Sprintf(format, args...))
}

// near is the place of the key, or of the nearest section around it.
func (r *report) near(path string) place {
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
func (r *report) unknown(path, key string, n *node, known []string) (meant string) {
	within := display(strings.TrimSuffix(strings.TrimSuffix(path, key), "."))
	text := fmt.Sprintf("%s is not a key of [%s]", clip(display(path)), within)
	if strings.HasPrefix(within, "instrument") {
		text = fmt.Sprintf("%s is not a key of [[%s]]", clip(display(path)), within)
	}
	if within == "" {
		text = fmt.Sprintf("%s is not a section of a bench file", clip(key))
	}
	if meant = nearest(key, known); meant != "" {
		text += fmt.Sprintf("; did you mean %q?", meant)
	} else if home := homeOf(key, reflect.TypeFor[Bench](), ""); home != "" {
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

func clip(s string) string {
	const most = 60
	if utf8.RuneCountInString(s) <= most {
		return s
	}
	return string([]rune(s)[:most]) + "…"
}
