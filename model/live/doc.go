// Package live is the experiment as a pure function of events.
//
// Core.Step folds one event into the state and names the work that follows.
// It opens no port, file or clock, and starts no goroutine. The same events
// give the same states and the same effects, which is what replay, the tests
// and the fault harness lean on. Limits are enforced through package limit:
// nothing here can command a pressure that it refuses.
package live
