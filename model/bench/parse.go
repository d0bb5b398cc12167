package bench

import "barline/model/form"

// Mistake is one thing wrong with a bench file, Mistakes all of them.
type (
	Mistake  = form.Mistake
	Mistakes = form.Mistakes
)

// Parse reads a bench file. Name is the file's name for messages. An error is
// always of type Mistakes and holds everything that was found: a mistake of
// syntax alone, since nothing behind it can be trusted, or all mistakes of
// content.
func Parse(data []byte, name string) (*Bench, error) {
	b := new(Bench)
	r, sound := form.Form{Noun: "bench file", AmbientKey: [2]string{"panel", "ambient"}}.Read(data, name, b)
	if sound {
		for i := range b.Instrument {
			b.Instrument[i].fillDefaults()
		}
		checker{r, b}.all()
	}
	if err := r.Err(); err != nil {
		return nil, err
	}
	return b, nil
}
