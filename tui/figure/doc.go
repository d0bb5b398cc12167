// Package figure draws pictures: of a screen, and of the light along a fibre.
//
// In a screen's picture Braille dots and line drawing become shapes, so that it
// looks the same whatever fonts its viewer has; words stay text that can be
// searched and read aloud. The pictures of README.md stand in testdata and are made by
//
//	go test ./tui/figure -update
package figure
