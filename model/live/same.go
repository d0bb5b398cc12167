package live

import (
	"reflect"

	"barline/model/flow"
)

// Same reports whether two states are identical: the promise of replay.
// Forecasts hold functions of the gas, which cannot be compared; of them it is
// what they say.
func Same(a, b State) bool {
	waitA, okA := a.ArriveIn()
	waitB, okB := b.ArriveIn()
	if a.forecasting != b.forecasting || okA != okB || waitA != waitB {
		return false
	}
	a.forecast, b.forecast = flow.Forecast{}, flow.Forecast{}
	return reflect.DeepEqual(a, b)
}
