package main

import (
	"strings"
	"testing"
)

// TestFlagged wants every table to name what was pooled against advice, with its reason,
// and the warnings that stand: the limits of Becker are off their middle by more than
// half a standard error (rule I2), those of Dubois by more than a tenth.
func TestFlagged(t *testing.T) {
	const sheet = "study,year,odds ratio,ci low,ci high,accept\n" +
		"Ahlgren,2001,0.71,0.49,1.03,\nBecker,2004,1.01,0.52,1.27,I2 asked the author; a slip in print\nCastro,2007,0.64,0.43,0.95,\nDubois,2010,0.93,0.65,1.21,\n"
	for _, args := range []string{"pool", "cumulative", "leave-one-out", "influence", "subsets", "next-trial --se 0.2", "small-study --allow-few", "explain --on year"} {
		words := strings.Fields(args)
		stdout, stderr, code := call(t, sheet, append([]string{words[0], "-"}, words[1:]...)...)
		text := strings.Join(strings.Fields(stdout), " ")
		if code != codeDone || !strings.Contains(text, "asked the author; a slip in print") || strings.Contains(text, "accept it by writing \"I2") {
			t.Errorf("%s: exit %d, the reason is missing, or acceptance is still offered:\n%s%s", args, code, stdout, stderr)
		}
		if words[0] != "pool" && !strings.Contains(text, "that nobody has accepted (") {
			t.Errorf("%s: the standing warning is not counted:\n%s", args, stdout)
		}
	}
}

// TestCallOfStandardInput: a call that a message shows for a sheet from standard input
// can be typed as it stands.
func TestCallOfStandardInput(t *testing.T) {
	_, stderr, code := call(t, "study,beta,se\nA,-0.2,0.1\nB,-0.5,0.2\n", "pool", "-")
	if code != codeData || !strings.Contains(stderr, `steelyard pool - --column "estimate=beta"`) {
		t.Errorf("exit %d, %s", code, stderr)
	}
}
