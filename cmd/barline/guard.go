package main

import (
	"fmt"
	"runtime/debug"
)

// breakdown takes a panic of the part of the program that is named: it holds
// the bench, closes the record and gives the terminal back.
type breakdown func(where string, value any, stack []byte)

// guard runs f and hands a panic of it to broken. Every goroutine of a session
// runs under it: a panic that nobody catches leaves the terminal unusable and
// the bench as it was.
func (broken breakdown) guard(where string, f func()) {
	defer func() {
		if v := recover(); v != nil {
			broken(where, v, debug.Stack())
		}
	}()
	f()
}

// safely runs f and returns a panic of it as an error, for goroutines that
// move nothing and whose end ends the screen.
func safely(f func() error) (err error) {
	defer func() {
		if v := recover(); v != nil {
			err = fmt.Errorf("the player broke down: %v\n%s", v, debug.Stack())
		}
	}()
	return f()
}
