// Peers measures the program against general-purpose peers that do the same work, in
// one run and in turn, and prints the ratios as a Markdown table. Run it from the top
// of the tree with "make bench-peers"; it needs python3 with numpy and scipy, and awk.
//
//	-sets   sets of ten studies in memory and in the file for bulk (1,000,000)
//	-rounds how often each pair is measured; the median of the ratios is printed (5)
package main

import (
	"flag"
	"fmt"
	"os"
	"path/filepath"
	"runtime"
	"strconv"
)

func main() {
	sets := flag.Int("sets", 1_000_000, "sets of ten studies")
	rounds := flag.Int("rounds", 5, "how often each pair is measured")
	write := flag.String("write", "", "only write the inputs into this folder, as measure has it do")
	flag.Parse()
	var err error
	if *write != "" {
		err = newSets(*sets, 10).writeAll(*write)
	} else {
		err = measure(*sets, *rounds)
	}
	if err != nil {
		fmt.Fprintln(os.Stderr, "peers:", err)
		os.Exit(1)
	}
}

// measure runs all pairs.
func measure(n, rounds int) error {
	folder, err := os.MkdirTemp("", "peers-*")
	if err != nil {
		return err
	}
	defer os.RemoveAll(folder)
	python, err := findPython()
	if err != nil {
		return err
	}
	program := filepath.Join(folder, "steelyard")
	if out, err := command("go", "build", "-o", program, "./cmd/steelyard").CombinedOutput(); err != nil {
		return fmt.Errorf("go build: %w\n%s", err, out)
	}
	// A process that starts another lends it its own peak of memory, so that this one
	// stays small until the others have been measured.
	self, err := os.Executable()
	if err != nil {
		return err
	}
	if out, err := command(self, "-sets", strconv.Itoa(n), "-write", folder).CombinedOutput(); err != nil {
		return fmt.Errorf("writing the inputs: %w\n%s", err, out)
	}
	table, longer := filepath.Join(folder, tableFile), filepath.Join(folder, longerFile)
	fmt.Printf("%s, %d processors, %s; %d rounds, medians; seconds are of processor time unless said\n\n", processor(), runtime.NumCPU(), runtime.Version(), rounds)
	fmt.Println("| work | here | peer | ratio of time | ratio of memory |\n|---|---|---|---|---|")
	bcg := filepath.Join("testdata", "checks", "bcg_counts.csv")
	err = compareProcesses("pool, 13 studies, whole process, against Python with scipy", rounds,
		[]string{program, "pool", bcg, "--tau", "dersimonian-laird", "--interval", "wald"}, []string{python, filepath.Join("testdata", "peers", "one_file.py"), bcg})
	if err != nil {
		return err
	}
	err = compareProcesses(fmt.Sprintf("bulk, %d sets of 10 rows, against awk -F, '{s+=$3}' (wall time)", n), rounds,
		[]string{program, "bulk", table}, []string{"awk", "-F,", "{s+=$3} END{print s}", table})
	if err != nil {
		return err
	}
	err = compareProcesses("bulk, ten times the sets, against itself", 1, []string{program, "bulk", longer}, []string{program, "bulk", table})
	if err != nil {
		return err
	}
	d := newSets(n, 10)
	for _, method := range []string{"moments", "likelihood"} {
		if err := compareInMemory(d, method, python, filepath.Join(folder, binaryFile), rounds); err != nil {
			return err
		}
	}
	return nil
}
