package modbus

// CRC returns the CRC-16 of an RTU frame: initial value FFFF, reflected
// polynomial A001, no final inversion. On the wire its low byte goes first.
//
// It tells every error of one, two or three bits in a frame of legal length.
// Source: MODBUS over Serial Line V1.02, section 6.2.2.
func CRC(p []byte) uint16 {
	crc := uint16(0xFFFF)
	for _, b := range p {
		crc = crc>>8 ^ crcTable[byte(crc)^b]
	}
	return crc
}

var crcTable = func() (t [256]uint16) {
	for i := range t {
		crc := uint16(i)
		for range 8 {
			if crc&1 != 0 {
				crc = crc>>1 ^ 0xA001
			} else {
				crc >>= 1
			}
		}
		t[i] = crc
	}
	return t
}()
