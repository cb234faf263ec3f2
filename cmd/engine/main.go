//go:build !js

// Engine answers changed analyses of a report page. In the page it is WebAssembly; as a
// program of its own it reads the page's data on its first line of standard input and a
// change on each further one, and writes a reply for each.
package main

import (
	"bufio"
	"encoding/json"
	"fmt"
	"io"
	"os"
)

func main() {
	if err := serve(os.Stdin, os.Stdout); err != nil {
		fmt.Fprintln(os.Stderr, "engine:", err)
		os.Exit(1)
	}
}

// serve answers line by line.
func serve(in io.Reader, out io.Writer) error {
	lines := bufio.NewReader(in)
	first, err := lines.ReadBytes('\n')
	if err != nil && err != io.EOF {
		return err
	}
	page, err := open(first)
	if err != nil {
		return err
	}
	replies := json.NewEncoder(out)
	for {
		line, err := lines.ReadBytes('\n')
		if len(line) > 0 {
			if err := replies.Encode(page.answer(line)); err != nil {
				return err
			}
		}
		if err == io.EOF {
			return nil
		}
		if err != nil {
			return err
		}
	}
}
