package modbus

import "fmt"

// Exception is the code by which a unit refuses a request. It is an error.
type Exception byte

const (
	IllegalFunction     Exception = 0x01
	IllegalAddress      Exception = 0x02
	IllegalValue        Exception = 0x03
	DeviceFailure       Exception = 0x04
	Acknowledge         Exception = 0x05
	DeviceBusy          Exception = 0x06
	MemoryParity        Exception = 0x08
	GatewayUnavailable  Exception = 0x0A
	GatewayTargetSilent Exception = 0x0B
)

// Meanings after V1.1b3, section 7.
var exceptionText = map[Exception]string{
	IllegalFunction:     "it does not know this function",
	IllegalAddress:      "it has no such register",
	IllegalValue:        "it does not take this value",
	DeviceFailure:       "it failed while carrying this out",
	Acknowledge:         "it has accepted this and needs more time",
	DeviceBusy:          "it is busy",
	MemoryParity:        "its memory has a parity error",
	GatewayUnavailable:  "the gateway has no path to it",
	GatewayTargetSilent: "the gateway got no answer from it",
}

// Error says what the unit refused, in words.
func (e Exception) Error() string {
	if text, ok := exceptionText[e]; ok {
		return fmt.Sprintf("unit refuses: %s (exception %02X)", text, byte(e))
	}
	return fmt.Sprintf("unit refuses with exception %02X", byte(e))
}
