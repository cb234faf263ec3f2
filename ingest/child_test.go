//go:build unix

package ingest

import (
	"context"
	"encoding/json"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"runtime"
	"runtime/debug"
	"strings"
	"syscall"
	"testing"
	"time"
)

// childVariable names the file that a child of the tests reads in place of them.
const childVariable = "STEELYARD_TEST_READ"

// childReport is what a child says of its reading.
type childReport struct {
	Studies, Findings int
	Error             string
	PeakMB            int // of the child alone, where the system says
}

// TestMain reads a file and reports, in a child; else it runs the tests.
func TestMain(m *testing.M) {
	path := os.Getenv(childVariable)
	if path == "" {
		os.Exit(m.Run())
	}
	// No file may grow, not even by a byte, and there is no folder for temporary ones.
	if err := syscall.Setrlimit(syscall.RLIMIT_FSIZE, &syscall.Rlimit{}); err != nil {
		fmt.Fprintln(os.Stderr, err)
		os.Exit(2)
	}
	debug.SetMemoryLimit(MemoryLimit)
	var report childReport
	x, _, err := Open(context.Background(), path, Options{})
	if err != nil {
		report.Error = err.Error()
	} else {
		report.Studies, report.Findings = len(x.Studies), len(x.Findings)
	}
	report.PeakMB = ownPeak()
	if err := json.NewEncoder(os.Stdout).Encode(report); err != nil {
		os.Exit(2)
	}
	os.Exit(0)
}

// ownPeak returns the largest resident size of this process in MB, 0 where the
// system has no /proc.
func ownPeak() int {
	status, err := os.ReadFile("/proc/self/status")
	if err != nil {
		return 0
	}
	kilobytes := 0
	for _, line := range strings.Split(string(status), "\n") {
		if value, ok := strings.CutPrefix(line, "VmHWM:"); ok {
			_, _ = fmt.Sscanf(value, "%d", &kilobytes)
		}
	}
	return kilobytes >> 10
}

// usage is what a child needed.
type usage struct {
	peakMB          int
	processor, wall time.Duration
}

// readInChild has a process of its own read a file.
func readInChild(t testing.TB, path string) (childReport, usage) {
	t.Helper()
	command := exec.Command(os.Args[0])
	command.Env = append(os.Environ(), childVariable+"="+path, "TMPDIR="+filepath.Join(t.TempDir(), "there", "is", "none"))
	start := time.Now()
	out, err := command.Output()
	if err != nil {
		t.Fatalf("%s: %v\n%s", filepath.Base(path), err, out)
	}
	var report childReport
	if err := json.Unmarshal(out, &report); err != nil {
		t.Fatalf("%s: %v\n%s", filepath.Base(path), err, out)
	}
	peak := int(command.ProcessState.SysUsage().(*syscall.Rusage).Maxrss) // kilobytes
	if runtime.GOOS == "darwin" {
		peak >>= 10 // bytes there
	}
	peak >>= 10
	if report.PeakMB > 0 { // a young process is charged with the size of its parent, too
		peak = report.PeakMB
	}
	return report, usage{peakMB: peak, processor: command.ProcessState.UserTime() + command.ProcessState.SystemTime(), wall: time.Since(start)}
}

func written(t testing.TB, name string, data []byte) string {
	t.Helper()
	path := filepath.Join(t.TempDir(), name)
	if err := os.WriteFile(path, data, 0o600); err != nil {
		t.Fatal(err)
	}
	return path
}

// TestReadingWritesNothing: with files forbidden to grow and no folder for temporary
// ones, text and workbooks are read all the same, so that a reader that is killed can
// leave nothing behind; the folder of the file holds that file alone.
func TestReadingWritesNothing(t *testing.T) {
	long := table{{"study", "y", "se", "note"}}
	for i := range 2_000 { // a sheet that a program with temporary files would put into one
		long = append(long, []any{fmt.Sprintf("Trial %d", i), 1, 0.5, strings.Repeat("w", 9_000)})
	}
	for name, data := range map[string][]byte{"long.xlsx": long.xlsx(t), "many.csv": manyStudies(2_000)} {
		path := written(t, name, data)
		report, _ := readInChild(t, path)
		if report.Error != "" || report.Studies != 2_000 {
			t.Errorf("%s: %+v", name, report)
		}
		entries, err := os.ReadDir(filepath.Dir(path))
		if err != nil || len(entries) != 1 {
			t.Errorf("%s: beside it lie %v (%v)", name, entries, err)
		}
	}
}
