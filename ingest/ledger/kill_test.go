package ledger

import (
	"bufio"
	"context"
	"fmt"
	"math/rand/v2"
	"os"
	"os/exec"
	"path/filepath"
	"strconv"
	"strings"
	"testing"
	"time"
)

// Names in the environment: the folder that a helper process updates without end,
// and how many updates the test asks for.
const (
	helperFolder = "STEELYARD_LEDGER_HELPER"
	killUpdates  = "STEELYARD_LEDGER_UPDATES"
)

func TestMain(m *testing.M) {
	if dir := os.Getenv(helperFolder); dir != "" {
		os.Exit(updateForever(dir))
	}
	os.Exit(m.Run())
}

// updateForever begins a ledger unless there is one, and adds states to it; each is
// acknowledged on standard output once it is recorded.
func updateForever(dir string) int {
	ctx := context.Background()
	for i := 1; ; i++ {
		e := entry(i)
		e.Record.Note = strings.Repeat("a long note ", 400)
		e.Files.Sheet.Data = append(e.Files.Sheet.Data, strconv.Itoa(os.Getpid())...)
		var state *State
		_, err := Open(dir)
		if err != nil {
			state, err = Start(ctx, dir, "helper", e)
		} else {
			var s *Store
			if s, err = Hold(ctx, dir, "helper"); err == nil {
				state, _, err = s.Append(e)
				s.Close()
			}
		}
		if err != nil {
			fmt.Fprintln(os.Stderr, err)
			return 1
		}
		fmt.Println("recorded", state.Number, state.Hash, state.Record.Input.Sheet.SHA256)
	}
}

// TestKilled kills the process that updates, at random times, until many updates
// were acknowledged: every acknowledged one is there with its sheet, nothing else is
// wrong, and the store goes on.
func TestKilled(t *testing.T) {
	want := 60
	if text := os.Getenv(killUpdates); text != "" {
		var err error
		if want, err = strconv.Atoi(text); err != nil {
			t.Fatal(err)
		}
	}
	dir := filepath.Join(t.TempDir(), "review")
	random := rand.New(rand.NewPCG(1, 2))
	acknowledged := map[string]int{}
	torn, kills := 0, 0
	for len(acknowledged) < want {
		updateUntilKilled(t, dir, time.Duration(1+random.IntN(60))*time.Millisecond, acknowledged)
		kills++
		l, err := Open(dir)
		if err != nil {
			if len(acknowledged) == 0 {
				continue // killed before the first was recorded
			}
			t.Fatalf("after %d kills: %v", kills, err)
		}
		if l.Torn != nil {
			torn++
		}
		if p := l.Damaged(); p != nil {
			t.Fatalf("after %d kills: %v", kills, p)
		}
		for hash, number := range acknowledged {
			if at, known := l.byHash[hash]; !known || l.States[at].Number != number {
				t.Fatalf("after %d kills: state %d (%s) was acknowledged and is lost", kills, number, hash[:8])
			}
		}
	}
	l := opened(t, dir)
	if len(l.Ends()) != 1 {
		t.Errorf("%d ends", len(l.Ends()))
	}
	for _, p := range verified(t, l) {
		if p.Gravity == Damage {
			t.Error(p)
		}
	}
	t.Logf("%d updates acknowledged, %d recorded, %d kills, %d torn lines", len(acknowledged), len(l.States), kills, torn)
}

// updateUntilKilled lets a helper process update and kills it after a while, counted
// from its first acknowledgement or, one time in eight, from its start.
func updateUntilKilled(t *testing.T, dir string, after time.Duration, acknowledged map[string]int) {
	t.Helper()
	helper := exec.Command(os.Args[0], "-test.run=^$")
	helper.Env = append(os.Environ(), helperFolder+"="+dir)
	var complaint strings.Builder
	helper.Stderr = &complaint
	out, err := helper.StdoutPipe()
	if err != nil {
		t.Fatal(err)
	}
	if err := helper.Start(); err != nil {
		t.Fatal(err)
	}
	kill := func() { time.AfterFunc(after, func() { _ = helper.Process.Kill() }) }
	waiting := after%(8*time.Millisecond) != 0
	if !waiting {
		kill()
	}
	lines := bufio.NewScanner(out)
	for lines.Scan() {
		fields := strings.Fields(lines.Text())
		if len(fields) != 4 || len(fields[3]) != len(root) {
			continue // cut short by the kill
		}
		number, err := strconv.Atoi(fields[1])
		if err != nil {
			t.Fatal(err)
		}
		acknowledged[fields[2]] = number
		if waiting {
			waiting = false
			kill()
		}
	}
	_ = helper.Wait() // it was killed
	if complaint.Len() > 0 {
		t.Fatalf("the helper complains: %s", complaint.String())
	}
}
