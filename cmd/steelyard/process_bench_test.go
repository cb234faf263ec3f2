package main

import (
	"os"
	"os/exec"
	"path/filepath"
	"testing"
)

// BenchmarkProcess times whole calls of the built program, start-up included;
// "version" is start-up alone. peak-MB is the largest resident size.
func BenchmarkProcess(b *testing.B) {
	program := filepath.Join(b.TempDir(), "steelyard")
	if out, err := exec.Command("go", "build", "-o", program, ".").CombinedOutput(); err != nil {
		b.Fatalf("go build: %v\n%s", err, out)
	}
	out := filepath.Join(b.TempDir(), "f.svg")
	for _, call := range []struct {
		name string
		args []string
	}{
		{"call=version", []string{"--version"}},
		{"call=pool/studies=13", []string{"pool", data + "checks/bcg_counts.csv"}},
		{"call=pool/workbook=demo", []string{"pool", data + "demo.xlsx"}},
		{"call=pool/method=conditional-exact", []string{"pool", data + "checks/bcg_counts.csv", "--method", "conditional-exact"}},
		{"call=chart/studies=13", []string{"chart", "forest", data + "checks/bcg_counts.csv", "--overwrite", "--out", out}},
	} {
		b.Run(call.name, func(b *testing.B) {
			var peak int64
			for b.Loop() {
				command := exec.Command(program, call.args...)
				command.Stderr = os.Stderr
				if err := command.Run(); err != nil {
					b.Fatal(err)
				}
				peak = max(peak, peakBytes(command.ProcessState))
			}
			b.ReportMetric(float64(peak)/1e6, "peak-MB")
		})
	}
}
