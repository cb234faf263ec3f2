// Pack builds the engine for browsers and packs it as text for the report page. It runs
// the Go toolchain and xz from the top of the source tree.
package main

import (
	"errors"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"strings"

	"steelyard/forest/whatif"
)

func main() {
	if err := pack(filepath.Join("forest", "whatif", "built")); err != nil {
		fmt.Fprintln(os.Stderr, "pack:", err)
		os.Exit(1)
	}
}

// coldPackages are compiled without inlining: an answer spends little time in them, and
// the text becomes shorter by 7 per cent.
var coldPackages = []string{
	"steelyard/forest/webpage", "steelyard/ingest/...",
	"steelyard/meta/synthesis", "steelyard/meta/review", "steelyard/meta/sparse", "steelyard/meta/effect", "steelyard/meta/panel", "steelyard/meta/missing",
	"gonum.org/...", "time", "fmt", "os", "reflect", "context", "internal/poll", "syscall/...",
}

// mostText is the most that the engine may take up in a page, in bytes.
const mostText = 2_000_000

// pack writes the engine and the toolchain's starting script into a folder.
func pack(folder string) error {
	xz, err := exec.LookPath("xz")
	if err != nil {
		return errors.New("xz is needed to pack the engine and was not found; install it (Debian: xz-utils), or build without the engine by \"go build ./cmd/steelyard\"")
	}
	scratch, err := os.MkdirTemp("", "engine")
	if err != nil {
		return err
	}
	defer os.RemoveAll(scratch) // what is left is a temporary file
	code := filepath.Join(scratch, "engine.wasm")
	arguments := []string{"build", "-trimpath", "-ldflags", "-s -w", "-o", code}
	for _, cold := range coldPackages {
		arguments = append(arguments, "-gcflags="+cold+"=-l")
	}
	build := exec.Command("go", append(arguments, "./cmd/engine")...)
	build.Env = append(os.Environ(), "GOOS=js", "GOARCH=wasm")
	build.Stderr = os.Stderr
	if err := build.Run(); err != nil {
		return fmt.Errorf("building the engine: %w", err)
	}
	packed, err := exec.Command(xz, "--format=lzma", "-9e", "--stdout", code).Output()
	if err != nil {
		return fmt.Errorf("packing the engine: %w", err)
	}
	root, err := exec.Command("go", "env", "GOROOT").Output()
	if err != nil {
		return fmt.Errorf("asking the toolchain where it is: %w", err)
	}
	start, err := os.ReadFile(filepath.Join(strings.TrimSpace(string(root)), "lib", "wasm", "wasm_exec.js"))
	if err != nil {
		return fmt.Errorf("the toolchain's starting script: %w", err)
	}
	if err := os.WriteFile(filepath.Join(folder, "wasm_exec.js"), start, 0o644); err != nil {
		return err
	}
	text := whatif.Text(packed)
	if len(text) > mostText {
		return fmt.Errorf("the engine takes %d bytes in the page, more than %d", len(text), mostText)
	}
	fmt.Printf("engine: %d kB of WebAssembly, %d kB in the page\n", fileSize(code)/1000, len(text)/1000)
	return os.WriteFile(filepath.Join(folder, "engine.txt"), []byte(text), 0o644)
}

func fileSize(path string) int64 {
	info, err := os.Stat(path)
	if err != nil {
		return 0
	}
	return info.Size()
}
