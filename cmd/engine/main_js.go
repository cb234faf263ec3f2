//go:build js

package main

import (
	"encoding/json"
	"syscall/js"
)

// main offers two functions to the script of the page: steelyardOpen takes the page's
// data and returns a problem or "", steelyardAnswer takes a change and returns the reply.
func main() {
	var page *opened
	js.Global().Set("steelyardOpen", js.FuncOf(func(_ js.Value, args []js.Value) any {
		var err error
		if page, err = open([]byte(args[0].String())); err != nil {
			return err.Error()
		}
		return ""
	}))
	js.Global().Set("steelyardAnswer", js.FuncOf(func(_ js.Value, args []js.Value) any {
		text, err := json.Marshal(page.answer([]byte(args[0].String())))
		if err != nil {
			return `{"problem":"the reply cannot be written"}`
		}
		return string(text)
	}))
	select {}
}
