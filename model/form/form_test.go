package form

import "testing"

func TestNearest(t *testing.T) {
	keys := []string{"length", "kind", "core_diameter", "loss", "wall"}
	for word, want := range map[string]string{"lenght": "length", "lengt": "length", "core-diameter": "core_diameter", "kidn": "kind", "x": "", "pressure": "", "Wall": "wall"} {
		if got := Nearest(word, keys); got != want {
			t.Errorf("%q: %q, want %q", word, got, want)
		}
	}
}

func TestKeysFillFieldsAndStrangersAreRefused(t *testing.T) {
	var into struct {
		Line struct {
			Rating string `toml:"rating"`
		} `toml:"line"`
	}
	if r, sound := (Form{Noun: "test"}).Read([]byte("[line]\nrating = \"x\"\n"), "t", &into); !sound || r.Err() != nil || into.Line.Rating != "x" {
		t.Errorf("%v, %v, %q", sound, r.Err(), into.Line.Rating)
	}
	r, sound := (Form{Noun: "test"}).Read([]byte("[lien]\n"), "t", &into)
	if !sound || r.Err() == nil || r.Err().Error() != `t:1:2: lien is not a section of a test; did you mean "line"?` {
		t.Errorf("%v, %v", sound, r.Err())
	}
}

func TestTagsThatLieAreFound(t *testing.T) {
	if err := CheckTags(&struct {
		N int `toml:"n" form:"default=5; most=3"`
	}{}); err == nil {
		t.Error("a default above its own bound was accepted")
	}
	if err := CheckTags(&struct {
		N int `toml:"n" form:"least=few"`
	}{}); err == nil {
		t.Error("a bound that is no number was accepted")
	}
}
