package procedure

import "slices"

// Verb is one thing that a step can do, and the keys that it takes.
type Verb struct {
	Name       string
	Needs, May []string
}

// Verbs lists all of them, by name.
func Verbs() []Verb {
	var list []Verb
	for name, v := range verbs {
		list = append(list, Verb{name, slices.Clone(v.needs), slices.Clone(v.may)})
	}
	slices.SortFunc(list, func(a, b Verb) int {
		switch {
		case a.Name < b.Name:
			return -1
		case a.Name > b.Name:
			return 1
		}
		return 0
	})
	return list
}
