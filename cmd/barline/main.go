// Command barline is the dashboard beside the gas-pressure controller of a
// gas-filled hollow-core-fibre ultraviolet source.
package main

import "os"

func main() {
	os.Exit(run(os.Args[1:], os.Stdin, os.Stdout, os.Stderr))
}
