package whatif

import (
	"math/big"
	"slices"
	"strings"
	"testing"

	"pgregory.net/rapid"
)

// TestText wants the digits to spell the bytes as one number, by the big integers of the
// standard library: two digits to base 91 for each 13 bits, from the lowest.
func TestText(t *testing.T) {
	if len(alphabet) != 91 || strings.ContainsAny(alphabet, "&<` \t") {
		t.Fatalf("%d digits: %s", len(alphabet), alphabet)
	}
	rapid.Check(t, func(t *rapid.T) {
		data := rapid.SliceOfN(rapid.Byte(), 0, 40).Draw(t, "data")
		text := Text(data)
		bits := 8 * len(data)
		want := 2 * (bits / 13)
		switch rest := bits % 13; {
		case rest > 6:
			want += 2
		case rest > 0:
			want++
		}
		if len(text) != want {
			t.Fatalf("%d bytes give %d digits, want %d", len(data), len(text), want)
		}
		if back := decoded(text, len(data)); string(back) != string(data) {
			t.Fatalf("%x comes back as %x from %q", data, back, text)
		}
	})
}

// decoded reads n bytes by big integers.
func decoded(text string, n int) []byte {
	sum := new(big.Int)
	for at := 0; at < len(text); at += 2 {
		group := 0
		for i := min(at+2, len(text)) - 1; i >= at; i-- {
			group = group*91 + strings.IndexByte(alphabet, text[i])
		}
		sum.Or(sum, new(big.Int).Lsh(big.NewInt(int64(group)), uint(at/2*13)))
	}
	bytes := make([]byte, max(n, (sum.BitLen()+7)/8))
	sum.FillBytes(bytes)
	slices.Reverse(bytes)
	return bytes
}
