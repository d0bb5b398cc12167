package main

import (
	"fmt"
	"strings"

	"github.com/spf13/cobra"

	"barline/model/procedure"
	"barline/model/unit"
)

// scanFlags say where a scan goes. It is written as a procedure of one scan, so
// that there is one place that reads and checks it.
type scanFlags struct {
	from, to, by, dwell, order string
	pressures, energies        []string
	seed                       int
}

func newScan() *cobra.Command {
	var f runFlags
	var s scanFlags
	cmd := &cobra.Command{
		Use:   "scan --from 7bar --to 11bar --by 0.25bar --dwell 20s",
		Short: "A pressure scan without a screen",
		Long: `A pressure scan without a screen: at each pressure the gas settles, emission is
averaged for the dwell, and one row goes into the logbook. It is short for a
procedure of one scan.

Where --from, --to and --by are wavelengths the pressures are those at which the
model puts the emission, so that its steps are even. --pressures lists them. With
--energies the whole scan is run at each pulse energy; the program waits until
somebody has set it and presses Enter.

` + cautions,
		Args: noArgs,
		RunE: func(cmd *cobra.Command, _ []string) error {
			if f.resume {
				return f.run(cmd, nil)
			}
			text, err := s.procedure()
			if err != nil {
				return err
			}
			return f.run(cmd, func(ambient unit.Pascal) (*procedure.Procedure, error) {
				return procedure.Parse([]byte(text), "scan", ambient)
			})
		},
	}
	f.add(cmd)
	flags := cmd.Flags()
	flags.StringVar(&s.from, "from", "", "lowest pressure, or shortest emission")
	flags.StringVar(&s.to, "to", "", "highest pressure, or longest emission")
	flags.StringVar(&s.by, "by", "", "step of pressure, or of emission")
	flags.StringSliceVar(&s.pressures, "pressures", nil, "the pressures themselves, such as \"7 bar, 9 bar, 8 bar\"")
	flags.StringSliceVar(&s.energies, "energies", nil, "pulse energies in the fibre, such as \"1.1 uJ, 1.3 uJ\"")
	flags.StringVar(&s.dwell, "dwell", "20 s", "time at each pressure after the gas has settled")
	flags.StringVar(&s.order, "order", "up", "up, down, up and down, or random")
	flags.IntVar(&s.seed, "order-seed", 1, "draws the random order")
	cmd.MarkFlagsMutuallyExclusive("from", "pressures")
	cmd.MarkFlagsMutuallyExclusive("resume", "from")
	cmd.MarkFlagsMutuallyExclusive("resume", "pressures")
	return cmd
}

// procedure returns the scan as the text of a procedure file.
func (s *scanFlags) procedure() (string, error) {
	var b strings.Builder
	fmt.Fprintf(&b, "[procedure]\nname = \"scan\"\n[[step]]\ndo = \"scan\"\ndwell = %q\norder = %q\nseed = %d\n", s.dwell, s.order, s.seed)
	list := func(key string, items []string) {
		for i := range items {
			items[i] = fmt.Sprintf("%q", strings.TrimSpace(items[i]))
		}
		fmt.Fprintf(&b, "%s = [%s]\n", key, strings.Join(items, ", "))
	}
	switch {
	case len(s.pressures) > 0:
		list("pressures", s.pressures)
	case s.from == "" || s.to == "" || s.by == "":
		return "", usage("a scan needs --from, --to and --by, or --pressures")
	default:
		keys := [...]string{"from", "to", "by"}
		if _, err := unit.ParseLength(s.from); err == nil {
			keys = [...]string{"from_emission", "to_emission", "emission_by"}
		}
		for i, text := range []string{s.from, s.to, s.by} {
			fmt.Fprintf(&b, "%s = %q\n", keys[i], text)
		}
	}
	if len(s.energies) > 0 {
		list("energies", s.energies)
	}
	return b.String(), nil
}
