//go:build soak

package instrument

const unplugCycles = 1000
