package unit

// The UnmarshalText methods let a configuration decoder fill the types.

func (p *Pascal) UnmarshalText(b []byte) (err error) { *p, err = ParsePressure(string(b)); return err }
func (r *PascalPerSecond) UnmarshalText(b []byte) (err error) {
	*r, err = ParsePressureRate(string(b))
	return err
}
func (k *Kelvin) UnmarshalText(b []byte) (err error) {
	*k, err = ParseTemperature(string(b))
	return err
}
func (m *Metre) UnmarshalText(b []byte) (err error)  { *m, err = ParseLength(string(b)); return err }
func (s *Second) UnmarshalText(b []byte) (err error) { *s, err = ParseSecond(string(b)); return err }
func (g *SecondSquared) UnmarshalText(b []byte) (err error) {
	*g, err = ParseGDD(string(b))
	return err
}
func (j *Joule) UnmarshalText(b []byte) (err error) { *j, err = ParseEnergy(string(b)); return err }
func (w *Watt) UnmarshalText(b []byte) (err error)  { *w, err = ParsePower(string(b)); return err }
func (h *Hertz) UnmarshalText(b []byte) (err error) { *h, err = ParseFrequency(string(b)); return err }
func (v *CubicMetre) UnmarshalText(b []byte) (err error) {
	*v, err = ParseVolume(string(b))
	return err
}
func (d *DecibelPerMetre) UnmarshalText(b []byte) (err error) {
	*d, err = ParseAttenuation(string(b))
	return err
}
func (n *SquareMetrePerWatt) UnmarshalText(b []byte) (err error) {
	*n, err = ParseNonlinearIndex(string(b))
	return err
}
func (q *PascalCubicMetrePerSecond) UnmarshalText(b []byte) (err error) {
	*q, err = ParseThroughput(string(b))
	return err
}
func (f *Fraction) UnmarshalText(b []byte) (err error) {
	*f, err = ParseFraction(string(b))
	return err
}
func (d *KelvinDifference) UnmarshalText(b []byte) (err error) {
	*d, err = ParseKelvinDifference(string(b))
	return err
}
func (s *CubicMetrePerSecond) UnmarshalText(b []byte) (err error) {
	*s, err = ParsePumpSpeed(string(b))
	return err
}
func (c *SonicConductance) UnmarshalText(b []byte) (err error) {
	*c, err = ParseSonicConductance(string(b))
	return err
}
