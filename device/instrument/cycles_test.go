//go:build !soak

package instrument

// With the build tag soak there are a thousand.
const unplugCycles = 50
