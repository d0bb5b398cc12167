// Package tui is the dashboard: pages that draw a snapshot, and keys that
// become intents.
//
// Render is pure: the same snapshot, page, size and style give the same text.
// Run shows pages in a terminal. Everything drawn comes from live.Snapshot;
// the package knows no instrument, file or port, and decides nothing about the
// gas: every intent is checked again by package live.
//
// Filled marks and plain numbers are measured. Open marks and dashed lines are
// predicted, and beside them stands by which answer. HOLD is the Tab key, on
// every page, in every form, without asking.
package tui
