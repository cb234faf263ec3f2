package main

import (
	"bufio"
	"encoding/binary"
	"errors"
	"math/rand/v2"
	"os"
	"path/filepath"
	"strconv"
)

// sets are many sets of k studies, one after another.
type sets struct {
	k    int
	y, s []float64
}

// newSets draws n sets of k studies, always the same for the same numbers.
func newSets(n, k int) *sets {
	random := rand.New(rand.NewPCG(20, 26))
	d := &sets{k: k}
	for range n {
		mean := 0.3 * random.NormFloat64()
		for range k {
			s := 0.1 + 0.4*random.Float64()
			d.s = append(d.s, s)
			d.y = append(d.y, mean+0.2*random.NormFloat64()+s*random.NormFloat64())
		}
	}
	return d
}

// Names of the inputs: numbers for numpy, a table, and one of ten times the sets.
const (
	binaryFile = "sets.bin"
	tableFile  = "sets.csv"
	longerFile = "longer.csv"
)

// writeAll writes all inputs into a folder.
func (d *sets) writeAll(folder string) error {
	return errors.Join(d.writeBinary(filepath.Join(folder, binaryFile)),
		d.writeTable(filepath.Join(folder, tableFile), 1), d.writeTable(filepath.Join(folder, longerFile), 10))
}

// writeBinary writes all estimates and then all standard errors, as 64-bit floats.
func (d *sets) writeBinary(path string) error {
	return write(path, func(w *bufio.Writer) error {
		if err := binary.Write(w, binary.LittleEndian, d.y); err != nil {
			return err
		}
		return binary.Write(w, binary.LittleEndian, d.s)
	})
}

// writeTable writes the sets as a long CSV with four decimals, several times over
// under other names.
func (d *sets) writeTable(path string, times int) error {
	return write(path, func(w *bufio.Writer) error {
		_, err := w.WriteString("set,study,estimate,se\n")
		var line []byte
		for i := 0; i < times*len(d.y) && err == nil; i++ {
			line = append(line[:0], 'g')
			line = append(strconv.AppendInt(line, int64(i/d.k), 10), ',')
			line = append(strconv.AppendInt(line, int64(i%d.k), 10), ',')
			line = append(strconv.AppendFloat(line, d.y[i%len(d.y)], 'f', 4, 64), ',')
			line = append(strconv.AppendFloat(line, d.s[i%len(d.y)], 'f', 4, 64), '\n')
			_, err = w.Write(line)
		}
		return err
	})
}

// write writes a file through a buffer.
func write(path string, fill func(w *bufio.Writer) error) error {
	file, err := os.Create(path)
	if err != nil {
		return err
	}
	defer file.Close()
	w := bufio.NewWriterSize(file, 1<<20)
	if err := fill(w); err != nil {
		return err
	}
	if err := w.Flush(); err != nil {
		return err
	}
	return file.Close()
}
