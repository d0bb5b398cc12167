// Package frame is a screenful of character cells.
//
// Pages and charts draw into an Area, which clips: nothing drawn can reach
// beyond it, so no line is ever wider than the screen. Cells carry an Ink, a
// meaning such as "predicted" or "alarm"; a Style turns meanings into the
// colours that the terminal at hand can show. Control characters never reach
// the terminal, whatever an instrument sent.
package frame
