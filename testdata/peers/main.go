package main

import "fmt"

func main() {
	d := newSets(1_000_000, 10)
	for _, m := range []string{"moments", "likelihood"} {
		r, err := d.best(m)
		fmt.Println(m, r, err)
	}
}
