//go:build !linux

package simulate

import (
	"context"

	"barline/model/clock"
)

func (b *Bench) serve(context.Context, clock.Clock) (map[string]string, error) {
	return nil, ErrNoTerminals
}
