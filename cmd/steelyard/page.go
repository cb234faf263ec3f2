package main

import "strings"

// The shape of the text answer, in characters.
const (
	answerWidth = 96
	labelWidth  = 18
	valueWidth  = 24
)

// page collects an answer: as lines of text, laid out for a terminal, and as blocks,
// from which other forms are made (see markdown).
//
// A command that writes a table builds a page with the methods below and hands it to
// reply together with its JSON document: text and Markdown come from the page, JSON
// and CSV from the document.
type page struct {
	strings.Builder
	blocks []block
}

// blockKind says what a block of an answer is.
type blockKind int

const (
	headingBlock   blockKind = iota
	sectionBlock             // a heading under another
	paragraphBlock           // text alone
	labelledBlock            // a label and its text; a blank label continues the one before
	itemBlock                // a paragraph with a mark, kept in label
	tableBlock
)

// block is a part of an answer before it is laid out.
type block struct {
	kind        blockKind
	label, text string
	columns     []column
	rows        [][]string
}

func (p *page) record(b block) { p.blocks = append(p.blocks, b) }

// write writes one line of text that belongs to a block recorded otherwise.
func (p *page) write(text string) { p.WriteString(strings.TrimRight(text, " ") + "\n") }

// line writes a heading, or with a blank text an empty line.
func (p *page) line(text string) {
	if text != "" {
		p.record(block{kind: headingBlock, text: text})
	}
	p.write(text)
}

// section writes a heading under that of an outcome.
func (p *page) section(text string) {
	p.record(block{kind: sectionBlock, text: text})
	p.write(text)
}

// row writes a label and its text, wrapped under itself.
func (p *page) row(label, text string) {
	p.record(block{kind: labelledBlock, label: label, text: text})
	p.fold(pad(label, labelWidth), text)
}

// value writes a label, a value and what is to be said about it, in three
// columns.
func (p *page) value(label, value, about string) {
	text := value
	if value != "" && about != "" {
		text += "; "
	}
	p.record(block{kind: labelledBlock, label: label, text: text + about})
	head := pad(label, labelWidth) + pad(value, valueWidth) + "  "
	if width(value) > valueWidth && about != "" { // what is said about it keeps its column
		p.write("  " + strings.TrimRight(head, " "))
		head = strings.Repeat(" ", labelWidth+valueWidth+2)
	}
	p.fold(head, about)
}

// wrapped writes a paragraph after its head, wrapped under its own beginning.
func (p *page) wrapped(head, text string) {
	if label := strings.TrimSpace(head); label != "" {
		p.record(block{kind: labelledBlock, label: label, text: text})
	} else {
		p.record(block{kind: paragraphBlock, text: text})
	}
	p.fold(head, text)
}

// fold writes a head and a text that is wrapped under its own beginning.
func (p *page) fold(head, text string) {
	indent := width(head)
	for i, line := range wrap(text, answerWidth-indent-2) {
		if i > 0 {
			head = strings.Repeat(" ", indent)
		}
		p.write("  " + head + line)
	}
}

// item writes a paragraph with a hanging mark: "·", "-", a number, "*" for a note
// that something in a table refers to, or " " for what belongs to the item before.
func (p *page) item(mark, text string) {
	p.record(block{kind: itemBlock, label: mark, text: text})
	for i, line := range wrap(text, answerWidth-4) {
		if i > 0 {
			mark = " "
		}
		p.write("  " + mark + " " + line)
	}
}

func pad(text string, columns int) string {
	return text + strings.Repeat(" ", max(0, columns-width(text)))
}
