package whatif

import (
	"math/big"
	"strings"
	"testing"

	"pgregory.net/rapid"
)

// TestText wants the digits of every group to spell its bytes as a number to base 85, by
// the big integers of the standard library.
func TestText(t *testing.T) {
	if len(alphabet) != 85 || strings.ContainsAny(alphabet, "&'<\"\\`") {
		t.Fatalf("%d digits: %s", len(alphabet), alphabet)
	}
	rapid.Check(t, func(t *rapid.T) {
		data := rapid.SliceOfN(rapid.Byte(), 0, 40).Draw(t, "data")
		text := Text(data)
		if want := (len(data)*5 + 3) / 4; len(text) != want {
			t.Fatalf("%d bytes give %d digits, want %d", len(data), len(text), want)
		}
		back := decoded(text)
		if string(back) != string(data) {
			t.Fatalf("%x comes back as %x from %q", data, back, text)
		}
	})
}

// decoded reads base 85 by big integers; missing digits count as the highest.
func decoded(text string) []byte {
	var data []byte
	for len(text) > 0 {
		n := min(5, len(text))
		group := text[:n] + strings.Repeat(string(alphabet[84]), 5-n)
		value := new(big.Int)
		for i := range group {
			value.Mul(value, big.NewInt(85))
			value.Add(value, big.NewInt(int64(strings.IndexByte(alphabet, group[i]))))
		}
		bytes := make([]byte, 5) // 85⁵ exceeds 2³² a little
		data = append(data, value.FillBytes(bytes)[1:n]...)
		text = text[n:]
	}
	return data
}
