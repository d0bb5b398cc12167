//go:build !amd64 || purego

package fourier

func vectors() bool { return false }

// Plans never call these where vectors says no.

func begin4(_, _ *float64, _ *complex128, _ *float64, _ int) {}
func middle4(_, _, _, _, _ *float64, _, _ int)               {}
func end4(_ *complex128, _, _ *float64, _ int)               {}
func end8(_ *complex128, _, _ *float64, _ int)               {}
func part(_, _ *complex128, _ *float64, _ int)               {}
func merge(_, _ *complex128, _ *float64, _ int)              {}
