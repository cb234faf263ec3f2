package main

import (
	"bytes"
	"errors"
	"fmt"
	"os"
	"os/exec"
	"runtime"
	"slices"
	"strconv"
	"strings"
	"syscall"
	"time"
)

// spent is what a whole process took.
type spent struct {
	cpu, wall float64 // seconds
	peak      float64 // MB
}

func command(name string, args ...string) *exec.Cmd {
	c := exec.Command(name, args...)
	c.Env = append(os.Environ(), "OMP_NUM_THREADS=1", "OPENBLAS_NUM_THREADS=1")
	return c
}

// runProcess runs a command and throws its output away.
func runProcess(args []string) (spent, error) {
	c := command(args[0], args[1:]...)
	var complaint bytes.Buffer
	c.Stderr = &complaint
	start := time.Now()
	if err := c.Run(); err != nil {
		return spent{}, fmt.Errorf("%s: %w: %s", args[0], err, complaint.String())
	}
	s := spent{wall: time.Since(start).Seconds(), cpu: (c.ProcessState.UserTime() + c.ProcessState.SystemTime()).Seconds()}
	if usage, ok := c.ProcessState.SysUsage().(*syscall.Rusage); ok {
		s.peak = float64(usage.Maxrss) / 1e3
		if runtime.GOOS == "darwin" {
			s.peak /= 1e3 // bytes there
		}
	}
	return s, nil
}

// compareProcesses runs two commands in turn and prints a row of the table.
func compareProcesses(work string, rounds int, ours, peer []string) error {
	var a, b []spent
	for range rounds + 1 {
		x, err := runProcess(ours)
		if err != nil {
			return err
		}
		y, err := runProcess(peer)
		if err != nil {
			return err
		}
		a, b = append(a, x), append(b, y)
	}
	a, b = a[1:], b[1:] // the first round warms up
	wall := func(s spent) float64 { return s.wall }
	peak := func(s spent) float64 { return s.peak }
	cpu := func(s spent) float64 { return s.cpu }
	fmt.Printf("| %s | %.3f s (processor %.3f s), %.0f MB | %.3f s (processor %.3f s), %.0f MB | %.3f | %.2f |\n", work,
		medianOf(a, wall), medianOf(a, cpu), medianOf(a, peak), medianOf(b, wall), medianOf(b, cpu), medianOf(b, peak),
		medianRatio(a, b, wall), medianRatio(a, b, peak))
	return nil
}

// compareInMemory pools all sets here and in numpy, in turn, and prints a row.
func compareInMemory(d *sets, method, python, binary string, rounds int) error {
	var a, b []spent
	var ours, theirs pooled
	for range rounds {
		var err error
		if ours, err = d.best(method); err != nil {
			return err
		}
		out, err := command(python, "testdata/peers/many_sets.py", binary, strconv.Itoa(len(d.y)/d.k), strconv.Itoa(d.k), method).Output()
		if err != nil {
			return fmt.Errorf("many_sets.py: %w", err)
		}
		if _, err := fmt.Sscan(string(out), &theirs.seconds, &theirs.estimate, &theirs.tau2); err != nil {
			return err
		}
		a, b = append(a, spent{cpu: ours.seconds}), append(b, spent{cpu: theirs.seconds})
	}
	cpu := func(s spent) float64 { return s.cpu }
	fmt.Printf("| %s, %d sets of %d in memory, one core, against vectorised numpy | %.3f s (%.1f ns per study, %.2f GB/s) | %.3f s | %.3f | |\n",
		map[string]string{"moments": "DerSimonian–Laird", "likelihood": "restricted ML, Hartung–Knapp, evidence"}[method], len(d.y)/d.k, d.k,
		medianOf(a, cpu), 1e9*medianOf(a, cpu)/float64(len(d.y)), 16e-9*float64(len(d.y))/medianOf(a, cpu), medianOf(b, cpu), medianRatio(a, b, cpu))
	if difference := ours.estimate - theirs.estimate; difference > 1e-4 || difference < -1e-4 {
		return fmt.Errorf("%s: the mean of the estimates is %v here and %v in numpy: not the same work", method, ours.estimate, theirs.estimate)
	}
	return nil
}

// medianOf returns the median of one figure.
func medianOf(all []spent, figure func(spent) float64) float64 {
	var values []float64
	for _, s := range all {
		values = append(values, figure(s))
	}
	slices.Sort(values)
	return values[len(values)/2]
}

// medianRatio returns the median of the ratios of one figure, pair by pair.
func medianRatio(a, b []spent, figure func(spent) float64) float64 {
	var ratios []float64
	for i := range a {
		ratios = append(ratios, figure(a[i])/figure(b[i]))
	}
	slices.Sort(ratios)
	return ratios[len(ratios)/2]
}

// findPython returns a Python that has numpy and scipy.
func findPython() (string, error) {
	for _, name := range []string{"python3", "/usr/bin/python3"} {
		if command(name, "-c", "import numpy, scipy").Run() == nil {
			return name, nil
		}
	}
	return "", errors.New("no python3 with numpy and scipy was found; install the packages python3-numpy and python3-scipy")
}

// processor names the machine's processor.
func processor() string {
	text, _ := os.ReadFile("/proc/cpuinfo")
	for _, line := range strings.Split(string(text), "\n") {
		if name, value, found := strings.Cut(line, ":"); found && strings.TrimSpace(name) == "model name" {
			return strings.TrimSpace(value)
		}
	}
	return runtime.GOARCH
}
