package drift

import (
	"fmt"
	"strings"
	"time"
)

// Sentence says what a drift is and what explains it:
//
//	+1.6 nm since 14:02; 72 %: cell A gauge zero, moved by -0.130 bar; 21 %: …
//
// Causes below a tenth are left out. Where the first has less than half, or
// shares it with one that looks the same from here, it says so. Shift is in m,
// since in the local time to be shown.
func Sentence(shift float64, since time.Time, findings []Finding, alike map[string][]string) string {
	lead := fmt.Sprintf("%+.1f nm since %s", shift*1e9, since.Format("15:04"))
	return strings.Join(append([]string{lead}, Explain(findings, alike)...), "; ")
}

// Explain says what explains a drift, a cause at a time, as Sentence does.
func Explain(findings []Finding, alike map[string][]string) (parts []string) {
	for i, f := range findings {
		if f.Probability < 0.1 && i > 0 {
			break
		}
		text := fmt.Sprintf("%.0f %%: %s", 100*f.Probability, f.Cause.Name)
		if f.Cause.Text != nil {
			text += ", " + f.Cause.Text(f.Amount)
		}
		parts = append(parts, text)
	}
	if len(findings) > 1 {
		first := findings[0]
		var same []string
		for _, name := range alike[first.Cause.Name] {
			for _, f := range findings {
				if f.Cause.Name == name && f.Probability >= 0.05 {
					same = append(same, name)
				}
			}
		}
		switch {
		case len(same) > 0:
			parts = append(parts, listed(append([]string{first.Cause.Name}, same...))+" cannot be told apart from here")
		case first.Probability < 0.5:
			parts = append(parts, "no cause stands out")
		}
	}
	return parts
}

// listed joins names as a sentence does: a, b and c.
func listed(names []string) string {
	n := len(names)
	return strings.Join(names[:n-1], ", ") + " and " + names[n-1]
}
