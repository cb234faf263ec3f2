// Demo writes testdata/demo.xlsx, the invented workbook that the program is shown
// with. Run it from the top of the tree:
//
//	go run ./testdata/demo
//
// The bytes are the same in every run.
package main

import (
	"fmt"
	"os"

	"steelyard/testdata/demo/workbook"
)

func main() {
	if err := write("testdata/demo.xlsx"); err != nil {
		fmt.Fprintln(os.Stderr, "demo:", err)
		os.Exit(3)
	}
}

func write(path string) error {
	data, err := workbook.Bytes()
	if err != nil {
		return err
	}
	return os.WriteFile(path, data, 0o644)
}
