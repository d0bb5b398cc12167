package reading

import "testing"

func TestZeroReadingIsAFailure(t *testing.T) {
	var r Reading
	if r.Status != Failure || r.Status.Usable() {
		t.Fatalf("a reading that nobody took is %v", r.Status)
	}
}

// The five conditions are those of NAMUR NE 107 (from memory).
func TestStatusTermsReadBack(t *testing.T) {
	usable := map[Status]bool{Good: true, MaintenanceRequired: true}
	for s := Failure; s <= Good; s++ {
		back, err := ParseStatus(s.String())
		if err != nil || back != s {
			t.Errorf("%v read back as %v, %v", s, back, err)
		}
		if s.Usable() != usable[s] {
			t.Errorf("%v: usable %v", s, s.Usable())
		}
	}
	if _, err := ParseStatus("fine"); err == nil {
		t.Error("an unknown status was accepted")
	}
}

func TestRolesReadBack(t *testing.T) {
	for r := NoRole; int(r) < RoleCount; r++ {
		back, err := ParseRole(r.String())
		if err != nil || back != r || r.String() == "" {
			t.Errorf("role %d is %q and reads back as %v, %v", r, r.String(), back, err)
		}
	}
}
