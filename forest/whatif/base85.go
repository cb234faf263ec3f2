package whatif

import "strings"

// alphabet are the 85 digits: printable characters from # on that need no escape in
// HTML or in a string of a script.
var alphabet = func() string {
	var digits strings.Builder
	for c := byte('#'); digits.Len() < 85; c++ {
		if !strings.ContainsRune("&'<\\`", rune(c)) {
			digits.WriteByte(c)
		}
	}
	return digits.String()
}()

// Text writes bytes in base 85, five digits for four bytes, the most significant first;
// of a last group of n bytes, filled up with zeros, the first n + 1 digits. Whoever reads it
// takes the missing digits for the highest.
func Text(data []byte) string {
	var text strings.Builder
	text.Grow((len(data) + 3) / 4 * 5)
	for len(data) > 0 {
		n := min(4, len(data))
		var group [4]byte
		copy(group[:], data[:n])
		value := uint32(group[0])<<24 | uint32(group[1])<<16 | uint32(group[2])<<8 | uint32(group[3])
		var digits [5]byte
		for i := 4; i >= 0; i-- {
			digits[i] = alphabet[value%85]
			value /= 85
		}
		text.Write(digits[:n+1])
		data = data[n:]
	}
	return text.String()
}
