package webpage

import (
	"strconv"
	"strings"
)

// markup collects HTML. Texts and the values of attributes are escaped; names of elements
// and attributes are ours.
type markup struct{ strings.Builder }

// on is the value of an attribute that stands by its name alone, such as hidden.
const on = "\x00"

var escapes = strings.NewReplacer("&", "&amp;", "<", "&lt;", ">", "&gt;", `"`, "&#34;", "'", "&#39;", "\x00", "\ufffd")

// raw writes markup of our own.
func (m *markup) raw(html ...string) {
	for _, part := range html {
		m.WriteString(part)
	}
}

// text writes a text.
func (m *markup) text(text string) { _, _ = escapes.WriteString(m, text) } // a builder takes everything

// open writes a start tag. Attributes are pairs of name and value; one whose value is
// blank is left out.
func (m *markup) open(name string, attributes ...string) {
	m.raw("<", name)
	for i := 0; i+1 < len(attributes); i += 2 {
		switch attribute, value := attributes[i], attributes[i+1]; value {
		case "":
		case on:
			m.raw(" ", attribute)
		default:
			m.raw(" ", attribute, `="`)
			m.text(value)
			m.raw(`"`)
		}
	}
	m.raw(">")
}

// shut writes an end tag.
func (m *markup) shut(name string) { m.raw("</", name, ">") }

// element writes a whole element that holds a text.
func (m *markup) element(name, text string, attributes ...string) {
	m.open(name, attributes...)
	m.text(text)
	m.shut(name)
}

// paragraphs writes each text as a paragraph.
func (m *markup) paragraphs(texts []string) {
	for _, text := range texts {
		m.element("p", text)
		m.raw("\n")
	}
}

// when returns value where it holds, else a blank, which leaves an attribute out.
func when(holds bool, value string) string {
	if holds {
		return value
	}
	return ""
}

func whole(n int) string { return strconv.Itoa(n) }
