package main

import (
	"archive/zip"
	"bytes"
	"context"
	"fmt"
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"testing"
	"time"
)

// TestBadCalls: every wrong call ends in its exit code and a message of one line
// on stderr that names the trouble and the remedy; nothing goes to stdout.
func TestBadCalls(t *testing.T) {
	bcg := data + "checks/bcg_counts.csv"
	for _, c := range []struct {
		args string
		code int
		says []string
	}{
		{"pol x.csv", codeCall, []string{"did you mean pool?"}},
		{"frobnicate", codeCall, []string{"the commands are: check, pool"}},
		{"trials.csv", codeCall, []string{"steelyard pool trials.csv"}},
		{"pool", codeCall, []string{"which file?"}},
		{"pool a.csv b.csv", codeCall, []string{"2 are given", "quotes"}},
		{"pool BCG --taus x", codeCall, []string{"did you mean --tau?"}},
		{"pool BCG --level", codeCall, []string{"--level needs a value"}},
		{"pool BCG --level 95", codeCall, []string{"--level", "for 95% write 0.95"}},
		{"pool BCG --level NaN", codeCall, []string{"not a number"}},
		{"pool BCG --level 1", codeCall, []string{"between 0 and 1"}},
		{"pool BCG --tau best", codeCall, []string{"paule-mandel", "restricted-ml"}},
		{"pool BCG --interval best", codeCall, []string{"hartung-knapp-floor"}},
		{"pool BCG --prior 20", codeCall, []string{"0.2"}},
		{"pool BCG --important 0.8,0.9,1", codeCall, []string{"3 numbers"}},
		{"pool BCG --seed -1", codeCall, []string{"whole number"}},
		{"pool BCG --where year", codeCall, []string{"COLUMN OPERATOR VALUE"}},
		{"pool BCG --column deaths", codeCall, []string{"--column"}},
		{"pool BCG --outcome flares", codeCall, []string{"no column of outcomes"}},
		{"pool DEMO --outcome flares", codeCall, []string{"flare within 24 weeks"}},
		{"pool BCG --format xml", codeCall, []string{"text, json"}},
		{"pool BCG --out BCG --overwrite", codeCall, []string{"would hold text; add --format csv"}},
		{"pool BCG --out x.json", codeCall, []string{"--format json"}},
		{"pool BCG --out FOLDER --overwrite", codeCall, []string{"is a folder"}},
		{"pool BCG --tau paule-mandel --tau hedges-olkin", codeCall, []string{"given twice"}},
		{"--out x.txt pool BCG", codeCall, []string{"command first"}},
		{"weigh --z 2 --df 5", codeCall, []string{"--df means nothing beside --z"}},
		{"weigh --p 0.02 --level 0.9", codeCall, []string{"--level means nothing"}},
		{"weigh --estimate 1 --se 1 --df2 3", codeCall, []string{"--df2 means nothing"}},
		{"weigh --z 2,5", codeCall, []string{"--z", "decimal point"}},
		{"pool BCG --interval henmi-copas --effects common", codeData, nil},
		{"pool nowhere.csv", codeFile, []string{"nowhere.csv"}},
		{"pool BCG --out /nowhere/at/all.txt", codeFile, []string{"/nowhere/at"}},
		{"pool BCG --out x.xlsx", codeCall, []string{"Markdown, JSON or CSV; name it .txt"}},
		{"next-trial LOR --size 100", codeCall, []string{"a measure that is not stated (--measure): give it with --se"}},
		{"chart next-trial BCG --se 0.2 --out x.svg", codeData, []string{"steelyard: the outcome has no curve over sizes"}},
		{"audit BCG", codeCall, []string{"--out F.xlsx"}},
		{"audit BCG --out x.xls", codeCall, []string{"name it .xlsx"}},
		{"audit DEMO --out DEMO --overwrite", codeCall, []string{"never overwritten"}},
		{"audit BCG --out /nowhere/at/all.xlsx", codeFile, []string{"/nowhere/at"}},
		{"chart", codeCall, []string{"forest"}},
		{"chart frest BCG", codeCall, []string{"did you mean forest?"}},
		{"chart forest BCG", codeCall, []string{"--out"}},
		{"chart forest BCG --out x.gif", codeCall, []string{".svg, .pdf or .png"}},
		{"chart forest BCG --out x.svg --width 90", codeCall, []string{"180", "85"}},
		{"chart forest BCG --out x.png --dpi 9", codeCall, []string{"50 to 1200"}},
		{"weigh", codeCall, []string{"give one of"}},
		{"weigh --z 1 --t 2", codeCall, []string{"2 are given"}},
		{"weigh --z NaN", codeCall, []string{"finite"}},
		{"weigh --z nought", codeCall, []string{"nought"}},
		{"weigh --t 2", codeCall, []string{"--df"}},
		{"weigh --f 2 --df 3", codeCall, []string{"--df2"}},
		{"weigh --chi2 -1 --df 3", codeCall, []string{"negative"}},
		{"weigh --p 0", codeCall, []string{"greater than 0"}},
		{"weigh --estimate 1", codeCall, []string{"--se"}},
		{"weigh --estimate 1 --ci-low 0", codeCall, []string{"both limits"}},
		{"weigh --estimate 1 --se -1", codeCall, []string{"--se"}},
		{"weigh --ratio --estimate -1 --se 1", codeCall, []string{"-1"}},
		{"weigh --z 1 --important 2", codeCall, []string{"--estimate"}},
		{"weigh --p 0.05 --one-sided", codeCall, []string{"direction"}},
		{"weigh trials.csv", codeCall, []string{"steelyard pool trials.csv"}},
	} {
		args := strings.Fields(strings.NewReplacer("BCG", bcg, "LOR", data+"checks/bcg_lor.csv", "DEMO", data+"demo.xlsx", "FOLDER", data+"checks").Replace(c.args))
		stdout, stderr, code := call(t, "", args...)
		if code != c.code {
			t.Errorf("%s: exit %d, want %d (%s)", c.args, code, c.code, stderr)
		}
		if c.code == codeData {
			continue // the outcome itself says why it has no result
		}
		if stdout != "" || strings.Count(stderr, "\n") != 1 || !strings.HasPrefix(stderr, "steelyard: ") {
			t.Errorf("%s: stdout %q, stderr %q", c.args, stdout, stderr)
		}
		for _, words := range c.says {
			if !strings.Contains(stderr, words) {
				t.Errorf("%s: the message %q does not say %q", c.args, stderr, words)
			}
		}
	}
}

// TestBadFiles: every unreadable or useless file ends in its exit code, without a
// panic, and with nothing written.
func TestBadFiles(t *testing.T) {
	demo, err := os.ReadFile(data + "demo.xlsx")
	if err != nil {
		t.Fatal(err)
	}
	header := "study,estimate,se\n"
	for _, c := range []struct {
		name, content string
		code          int
		says          string
	}{
		{"empty.csv", "", codeFile, "empty"},
		{"cut.xlsx", string(demo[:len(demo)/2]), codeFile, "cut short or damaged"},
		{"noise.xlsx", "\x00\x01\x02\x03", codeFile, "noise.xlsx"},
		{"old.xls", "\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1" + strings.Repeat("\x00", 600), codeFile, ".xlsx"},
		{"locked.xlsx", "\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1" + strings.Repeat("\x00", 600) + utf16("EncryptedPackage"), codeFile, "password"},
		{"bomb.xlsx", bomb(t), codeFile, "bomb.xlsx"},
		{"picture.csv", "\x89PNG\r\n\x1a\n" + strings.Repeat("\x00", 100), codeFile, "picture.csv"},
		{"wide.csv", strings.Repeat("x,", 10000) + "x\n" + strings.Repeat("1,", 10000) + "1\n", codeFile, "1000 columns"},
		{"headless.csv", "1,2,3\n4,5,6\n", codeData, "--column"},
		{"onlyheader.csv", header, codeData, ""},
		{"nan.csv", header + "A,NaN,1\n", codeData, "not a number"},
		{"inf.csv", header + "A,Inf,1\n", codeData, "not a number"},
		{"huge.csv", header + "A,1e308,1\nB,-1e308,1\n", codeData, "too large"},
		{"zero.csv", header + "A,1,0\nB,1,1\n", codeData, "endless weight"},
		{"negative.csv", header + "A,1,-1\nB,1,1\n", codeData, "cannot be below 0"},
		{"twice.csv", header + "A,1,1\nA,1,1\nB,2,1\n", codeData, "A"},
		{"one.csv", header + "A,1,0.5\n", codeDone, "One study"},
	} {
		folder := t.TempDir()
		path := filepath.Join(folder, c.name)
		if err := os.WriteFile(path, []byte(c.content), 0o644); err != nil {
			t.Fatal(err)
		}
		stdout, stderr, code := call(t, "", "pool", path)
		if code != c.code || !strings.Contains(stdout+stderr, c.says) {
			t.Errorf("%s: exit %d, want %d; want %q in:\n%s%s", c.name, code, c.code, c.says, stdout, stderr)
		}
		// A call that the message shows repeats the path as it was typed.
		if strings.Contains(stdout+strings.Replace(stderr, "steelyard pool "+path, "", 1), folder) {
			t.Errorf("%s: the output names a folder of this machine: %s%s", c.name, stdout, stderr)
		}
		_, stderr, code = call(t, "", "chart", "forest", path, "--out", filepath.Join(folder, "chart.svg"))
		if c.code == codeFile && code != codeFile {
			t.Errorf("%s: chart: exit %d, want %d: %s", c.name, code, c.code, stderr)
		}
		if entries, _ := os.ReadDir(folder); c.code == codeFile && len(entries) != 1 {
			t.Errorf("%s: something was written: %v", c.name, entries)
		}
	}
}

func TestFolderAndPermission(t *testing.T) {
	folder := t.TempDir()
	if _, stderr, code := call(t, "", "pool", folder); code != codeFile || !strings.Contains(stderr, "folder") {
		t.Errorf("a folder: exit %d, %s", code, stderr)
	}
	closed := filepath.Join(folder, "closed.csv")
	if err := os.WriteFile(closed, []byte("study,estimate,se\nA,1,1\n"), 0); err != nil {
		t.Fatal(err)
	}
	if _, err := os.ReadFile(closed); err == nil {
		t.Log("this user may read every file; permission is not tried")
		return
	}
	if _, stderr, code := call(t, "", "pool", closed); code != codeFile || !strings.Contains(stderr, "closed.csv") {
		t.Errorf("no permission: exit %d, %s", code, stderr)
	}
}

// TestInputStays: the input is never an output, not even with --overwrite.
func TestInputStays(t *testing.T) {
	input := filepath.Join(t.TempDir(), "trials.txt")
	content := "study,estimate,se\nA,1,1\n"
	if err := os.WriteFile(input, []byte(content), 0o644); err != nil {
		t.Fatal(err)
	}
	if _, stderr, code := call(t, "", "pool", input, "--out", input, "--overwrite"); code != codeCall || !strings.Contains(stderr, "never overwritten") {
		t.Errorf("exit %d, %s", code, stderr)
	}
	if after, err := os.ReadFile(input); err != nil || string(after) != content {
		t.Errorf("the input is now %q, %v", after, err)
	}
}

// TestHelpAnywhere: help is help wherever it is asked for.
func TestHelpAnywhere(t *testing.T) {
	want, _, _ := call(t, "", "pool", "--help")
	for _, args := range [][]string{{"pool", "x.csv", "--help"}, {"pool", "-h"}, {"pool", "--level", "0.9", "x.csv", "--help"}} {
		if got, stderr, code := call(t, "", args...); code != codeDone || got != want {
			t.Errorf("%v: exit %d, %s%s", args, code, stderr, got)
		}
	}
	general, _, _ := call(t, "", "--help")
	if got, _, code := call(t, "", "help"); code != codeDone || got != general {
		t.Errorf("help: exit %d\n%s", code, got)
	}
	if got, _, code := call(t, "", "version"); code != codeDone || !strings.Contains(got, version) {
		t.Errorf("version: exit %d, %s", code, got)
	}
}

// TestHelpGaps: in every command's help a flag stands apart from its explanation, on a
// line of its own where it is too long, and no line is wider than 100.
func TestHelpGaps(t *testing.T) {
	flag := regexp.MustCompile(`^  --[a-z0-9-]+($|  +\S)`)
	for _, command := range newApp(streams{}).Commands {
		calls := [][]string{{command.Name}}
		for _, sub := range command.Subcommands {
			calls = append(calls, []string{command.Name, sub.Name})
		}
		for _, args := range calls {
			text, _, _ := call(t, "", append(args, "--help")...)
			for line := range strings.Lines(text) {
				line = strings.TrimRight(line, "\n")
				if strings.HasPrefix(line, "  --") && !flag.MatchString(line) || len([]rune(line)) > 100 {
					t.Errorf("%v: %q", args, line)
				}
			}
			if len(command.Flags) > 0 && !strings.Contains(text, "\n  --") {
				t.Errorf("%v: no flags in\n%s", args, text)
			}
		}
	}
}

// stuck is an input that never ends.
type stuck struct{}

func (stuck) Read([]byte) (int, error) { select {} }

// TestInterruptedInput: an interrupt ends the wait for standard input.
func TestInterruptedInput(t *testing.T) {
	ctx, cancel := context.WithTimeout(context.Background(), 50*time.Millisecond)
	defer cancel()
	var out, errs bytes.Buffer
	if code := run(ctx, []string{"steelyard", "pool", "-"}, streams{in: stuck{}, out: &out, err: &errs}); code != codeInterrupted {
		t.Errorf("exit %d, %s", code, errs.String())
	}
}

// TestInterrupted: a cancelled call exits with 130.
func TestInterrupted(t *testing.T) {
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	var out, errs bytes.Buffer
	code := run(ctx, []string{"steelyard", "pool", data + "demo.xlsx"}, streams{in: strings.NewReader(""), out: &out, err: &errs})
	if code != codeInterrupted || out.Len() != 0 {
		t.Errorf("exit %d, stdout %q", code, out.String())
	}
}

func utf16(text string) string {
	var b strings.Builder
	for _, r := range text {
		b.WriteRune(r)
		b.WriteByte(0)
	}
	return b.String()
}

// bomb returns a small archive with parts that unpack to more than is read.
func bomb(t *testing.T) string {
	t.Helper()
	var b bytes.Buffer
	z := zip.NewWriter(&b)
	for _, name := range []string{"[Content_Types].xml", "_rels/.rels", "xl/workbook.xml", "xl/worksheets/sheet1.xml"} {
		w, err := z.Create(name)
		if err != nil {
			t.Fatal(err)
		}
		fmt.Fprint(w, `<?xml version="1.0"?><worksheet>`)
		if strings.Contains(name, "sheet1") || strings.Contains(name, "workbook") {
			blank := bytes.Repeat([]byte(" "), 1<<20)
			for range 160 {
				if _, err := w.Write(blank); err != nil {
					t.Fatal(err)
				}
			}
		}
	}
	if err := z.Close(); err != nil {
		t.Fatal(err)
	}
	return b.String()
}
