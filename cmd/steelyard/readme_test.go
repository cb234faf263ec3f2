package main

import (
	"bytes"
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"strings"
	"testing"
)

// consoleBlock is a fenced block of the README with calls and what they print.
var consoleBlock = regexp.MustCompile("(?s)```console\n(.*?)```")

// TestReadme runs every command of the README's transcripts from the top of the
// tree and compares what it prints; -update rewrites the README. "make demo"
// stands for the calls of its recipe; "make test" is shown by its packages, whose
// times differ from run to run.
func TestReadme(t *testing.T) {
	t.Chdir("../..")
	raw, err := os.ReadFile("README.md")
	if err != nil {
		t.Fatal(err)
	}
	commands := 0
	fresh := consoleBlock.ReplaceAllStringFunc(string(raw), func(block string) string {
		body := consoleBlock.FindStringSubmatch(block)[1]
		var b strings.Builder
		for _, line := range strings.Split(body, "\n") {
			command, isCommand := strings.CutPrefix(line, "$ ")
			if !isCommand {
				continue
			}
			commands++
			b.WriteString(line + "\n" + transcript(t, command, body))
		}
		return "```console\n" + b.String() + "```"
	})
	if commands < 3 {
		t.Fatalf("the README shows %d commands; the test would check nothing", commands)
	}
	if *update {
		if err := os.WriteFile("README.md", []byte(fresh), 0o644); err != nil {
			t.Fatal(err)
		}
		return
	}
	if fresh != string(raw) {
		t.Errorf("the README's transcript is not what the commands print; run: make golden\n%s", firstDifference(string(raw), fresh))
	}
}

// transcript returns what a command prints.
func transcript(t *testing.T, command, shown string) string {
	t.Helper()
	switch {
	case command == "make demo":
		return demoTranscript(t)
	case command == "make test":
		return testTranscript(t, shown)
	case strings.HasPrefix(command, "./steelyard "):
		stdout, stderr, _ := call(t, "", splitCommand(command)[1:]...)
		return stdout + stderr
	}
	t.Fatalf("the README shows %q, which this test cannot run", command)
	return ""
}

// demoTranscript runs the calls that "make demo" would make.
func demoTranscript(t *testing.T) string {
	t.Helper()
	recipe, err := exec.Command("make", "-n", "demo").Output()
	if err != nil {
		t.Fatalf("make -n demo: %v", err)
	}
	var b strings.Builder
	for _, line := range strings.Split(string(recipe), "\n") {
		if !strings.HasPrefix(line, "./steelyard ") {
			continue
		}
		args := splitCommand(line)[1:]
		for i, arg := range args {
			if arg == "--out" { // the test's own folder, shown as the recipe's
				args[i+1] = filepath.Join(t.TempDir(), filepath.Base(args[i+1]))
			}
		}
		stdout, stderr, code := call(t, "", args...)
		if code != codeDone {
			t.Fatalf("%s: exit %d, %s", line, code, stderr)
		}
		b.WriteString(line + "\n" + regexp.MustCompile(`(?m)^/.*/`).ReplaceAllString(stdout, "out/"))
	}
	return b.String()
}

// testTranscript keeps the shown lines if they name the packages that go test
// would, else writes new ones.
func testTranscript(t *testing.T, shown string) string {
	t.Helper()
	out, err := exec.Command("go", "list", "./...").Output()
	if err != nil {
		t.Fatalf("go list: %v", err)
	}
	packages := strings.Fields(string(out))
	kept := regexp.MustCompile(`(?m)^ok  \t(\S+)\t[0-9.]+s\n`).FindAllStringSubmatch(shown, -1)
	same := len(kept) == len(packages)
	var b strings.Builder
	for i, name := range packages {
		line := "ok  \t" + name + "\t0.1s\n"
		if same && kept[i][1] == name {
			line = kept[i][0]
		}
		b.WriteString(line)
	}
	return b.String()
}

// splitCommand splits a command line at blanks outside double quotes.
func splitCommand(line string) []string {
	var all []string
	for _, match := range regexp.MustCompile(`"([^"]*)"|(\S+)`).FindAllStringSubmatch(line, -1) {
		all = append(all, match[1]+match[2])
	}
	return all
}

// TestReadmeFigures redraws the README's figures; -update rewrites them.
func TestReadmeFigures(t *testing.T) {
	const folder = "../../testdata/figures"
	for name, args := range map[string][]string{
		"flare.svg":   {"forest", data + "demo.xlsx", "--outcome", "flare within 24 weeks"},
		"arrival.svg": {"cumulative", data + "checks/bcg_counts.csv"},
	} {
		path := filepath.Join(t.TempDir(), name)
		if _, stderr, code := call(t, "", append([]string{"chart", args[0], "--out", path}, args[1:]...)...); code != codeDone {
			t.Fatalf("%s: exit %d, %s", name, code, stderr)
		}
		got, err := os.ReadFile(path)
		if err != nil {
			t.Fatal(err)
		}
		if *update {
			if err := writeWhole(filepath.Join(folder, name), got, true); err != nil {
				t.Fatal(err)
			}
			continue
		}
		want, err := os.ReadFile(filepath.Join(folder, name))
		if err != nil {
			t.Fatalf("%v; write it with: make golden", err)
		}
		if !bytes.Equal(got, want) {
			t.Errorf("%s is not what the command draws; run: make golden", name)
		}
	}
}
