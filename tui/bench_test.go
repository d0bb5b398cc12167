package tui

import (
	"fmt"
	"testing"

	"barline/tui/frame"
)

// One frame of the bench page, from snapshot to text.
func BenchmarkFrame(b *testing.B) {
	for _, size := range [][2]int{{80, 24}, {120, 40}, {200, 60}} {
		b.Run(fmt.Sprintf("%dx%d", size[0], size[1]), func(b *testing.B) {
			s := situations()["filling"]
			b.ReportAllocs()
			for b.Loop() {
				Render(s, Bench, size[0], size[1], Style{Colours: frame.Palette})
			}
		})
	}
}
