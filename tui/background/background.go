// Package background says that the terminal is dark before anything asks it.
//
// Importing bubbletea asks the terminal for its background colour and waits
// five seconds for one that does not answer, unless lipgloss has been told by
// then. Packages without unmet imports are initialised in the order of their
// paths (the Go Specification, "Program initialization"), and this path sorts
// before bubbletea's, so importing this package is enough. It must import
// nothing but lipgloss. What the background really is stands in the bench
// file; our own drawing never asks lipgloss.
package background

import "github.com/charmbracelet/lipgloss"

func init() { lipgloss.SetHasDarkBackground(true) }
