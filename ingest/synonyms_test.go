package ingest

import "testing"

// TestPairsFoldAsWholes wants every pair of a quantity and an arm to be known as the
// whole phrase folds.
func TestPairsFoldAsWholes(t *testing.T) {
	d, checked := vocabulary(), 0
	for _, all := range [][]quantity{quantities, namedQuantities} {
		for _, q := range all {
			for _, arms := range [][]string{treatedWords, controlWords} {
				for _, arm := range arms {
					for _, word := range q.words {
						for _, phrase := range []string{word + " " + arm, arm + " " + word} {
							folded, _ := fold(phrase)
							if _, known := d.phrases[folded]; !known {
								t.Errorf("%q, folded %q, is not known", phrase, folded)
							}
							checked++
						}
					}
				}
			}
		}
	}
	if checked < 1000 {
		t.Errorf("only %d phrases", checked)
	}
}
