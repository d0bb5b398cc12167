package bench

import (
	"reflect"

	"barline/model/unit"
)

// Parse reads a bench file. Name is the file's name for messages. An error is
// always of type Mistakes and holds everything that was found: a mistake of
// syntax alone, since nothing behind it can be trusted, or all mistakes of
// content.
func Parse(data []byte, name string) (*Bench, error) {
	r := &report{file: name, nodes: map[string]*node{}}
	root := r.syntax(data)
	if root == nil {
		return nil, r.mistakes
	}
	d := &decoder{report: r}
	if n := root.find("panel", "ambient"); n != nil && n.shape == isText {
		ambient, err := unit.ParsePressure(n.text)
		d.ambient, d.ambientGiven = ambient, err == nil
	}
	b := new(Bench)
	d.section(root, reflect.ValueOf(b).Elem(), "")
	for i := range b.Instrument {
		b.Instrument[i].fillDefaults()
	}
	c := checker{r, b}
	c.all()
	if len(r.mistakes) > 0 {
		r.mistakes.sort()
		return nil, r.mistakes
	}
	return b, nil
}
