package whatif

import "strings"

// alphabet are the 91 digits: printable characters that need no escape in an element of
// HTML that holds a script.
var alphabet = func() string {
	var digits strings.Builder
	for c := byte('!'); c <= '~'; c++ {
		if c != '<' && c != '&' && c != '`' {
			digits.WriteByte(c)
		}
	}
	return digits.String()
}()

// groupBits is what two digits hold, as 91² is a little more than 2¹³; digitBits is what
// one holds for certain.
const (
	groupBits = 13
	digitBits = 6
)

// Text writes bytes in base 91, two digits for 13 bits: of the bytes' bits, the lowest
// first, and of the digits the lower first. The bits that remain are filled up with zeros,
// to 6 for one digit or to 13 for two.
func Text(data []byte) string {
	var text strings.Builder
	text.Grow(len(data)*16/groupBits + 2)
	waiting, bits := 0, 0
	for _, b := range data {
		waiting |= int(b) << bits
		if bits += 8; bits >= groupBits {
			writeGroup(&text, waiting&(1<<groupBits-1))
			waiting >>= groupBits
			bits -= groupBits
		}
	}
	switch {
	case bits > digitBits:
		writeGroup(&text, waiting)
	case bits > 0:
		text.WriteByte(alphabet[waiting])
	}
	return text.String()
}

func writeGroup(text *strings.Builder, value int) {
	text.WriteByte(alphabet[value%len(alphabet)])
	text.WriteByte(alphabet[value/len(alphabet)])
}
