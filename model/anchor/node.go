package anchor

import (
	"encoding/json"
	"fmt"
	"math"

	"barline/model/unit"
)

// Node is what a task found. It is kept on disk.
type Node struct {
	Density     float64 // mol/m³
	Energy      unit.Joule
	Moved       Input
	Lobes       []Lobe  // strongest first, at most MaxBranches
	Ionised     float64 // largest share of the atoms along the fibre
	Compression unit.Metre
	Compressed  unit.Watt // peak power there
	Reasons     []string  // against trusting it
}

// Lobe is one lobe of a node's spectrum.
type Lobe struct {
	Centroid   unit.Metre
	Peak       unit.Metre
	Width      unit.Metre
	Conversion float64 // of the output energy
}

// MaxBranches bounds the lobes of one node and of one answer.
const MaxBranches = 4

// stored is a node as it stands on disk: plain numbers, units in the keys.
type stored struct {
	Density     float64      `json:"density_mol_m3"`
	Energy      float64      `json:"energy_J"`
	Moved       Input        `json:"moved,omitempty"`
	Lobes       []storedLobe `json:"lobes"`
	Ionised     float64      `json:"ionised_fraction"`
	Compression float64      `json:"compression_m"`
	Compressed  float64      `json:"compressed_peak_power_W"`
	Reasons     []string     `json:"reasons,omitempty"`
}

type storedLobe struct {
	Centroid   float64 `json:"centroid_m"`
	Peak       float64 `json:"peak_m"`
	Width      float64 `json:"width_m"`
	Conversion float64 `json:"conversion"`
}

// MarshalJSON writes the node with its units in the keys.
func (n Node) MarshalJSON() ([]byte, error) {
	s := stored{n.Density, float64(n.Energy), n.Moved, []storedLobe{}, n.Ionised, float64(n.Compression), float64(n.Compressed), n.Reasons}
	for _, l := range n.Lobes {
		s.Lobes = append(s.Lobes, storedLobe{float64(l.Centroid), float64(l.Peak), float64(l.Width), l.Conversion})
	}
	return json.Marshal(s)
}

// UnmarshalJSON reads what MarshalJSON wrote. It refuses what is no node.
func (n *Node) UnmarshalJSON(text []byte) error {
	var s stored
	if err := json.Unmarshal(text, &s); err != nil {
		return err
	}
	got := Node{Density: s.Density, Energy: unit.Joule(s.Energy), Moved: s.Moved, Ionised: s.Ionised,
		Compression: unit.Metre(s.Compression), Compressed: unit.Watt(s.Compressed), Reasons: s.Reasons}
	for _, l := range s.Lobes {
		got.Lobes = append(got.Lobes, Lobe{unit.Metre(l.Centroid), unit.Metre(l.Peak), unit.Metre(l.Width), l.Conversion})
	}
	if err := got.check(); err != nil {
		return err
	}
	*n = got
	return nil
}

func (n Node) check() error {
	if !(n.Density > 0) || !(n.Energy > 0) || math.IsInf(n.Density+float64(n.Energy), 0) || n.Moved >= InputCount || len(n.Lobes) > MaxBranches {
		return fmt.Errorf("%g mol/m³ and %g J with %d lobes is no node", n.Density, float64(n.Energy), len(n.Lobes))
	}
	for _, l := range n.Lobes {
		if !(l.Centroid > 50*unit.Nanometre && l.Centroid < 10*unit.Micrometre) || !(l.Conversion >= 0 && l.Conversion <= 1) {
			return fmt.Errorf("node at %g mol/m³: lobe at %g nm with %g of the energy is none", n.Density, l.Centroid.Nanometres(), l.Conversion)
		}
	}
	return nil
}
