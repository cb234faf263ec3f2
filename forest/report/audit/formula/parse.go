package formula

import (
	"fmt"
	"strconv"
	"strings"
)

// Cell is the place of a cell: its sheet (blank for the formula's own), column and
// row, both counted from 1.
type Cell struct {
	Sheet    string
	Col, Row int
}

// Range is a block of cells with its corners.
type Range struct{ From, To Cell }

// Expression is a formula that has been read.
type Expression struct{ root node }

// Parse reads a formula, written without the leading equals sign. It returns an error
// that shows where it stopped understanding.
func Parse(text string) (*Expression, error) {
	p := &parser{text: text}
	root, err := p.comparison()
	if err != nil {
		return nil, fmt.Errorf("formula %q: %w", text, err)
	}
	if p.skip(); p.at < len(p.text) {
		return nil, fmt.Errorf("formula %q: %q is not understood", text, p.text[p.at:])
	}
	return &Expression{root}, nil
}

type parser struct {
	text string
	at   int
}

func (p *parser) skip() {
	for p.at < len(p.text) && p.text[p.at] == ' ' {
		p.at++
	}
}

// take takes the first of the given symbols that stands next; blank if none does.
func (p *parser) take(symbols ...string) string {
	p.skip()
	for _, s := range symbols {
		if strings.HasPrefix(p.text[p.at:], s) {
			p.at += len(s)
			return s
		}
	}
	return ""
}

// chain reads operands joined by operators of one rank, from the left.
func (p *parser) chain(operand func() (node, error), operators ...string) (node, error) {
	left, err := operand()
	for err == nil {
		op := p.take(operators...)
		if op == "" {
			return left, nil
		}
		var right node
		if right, err = operand(); err == nil {
			left = binary{op, left, right}
		}
	}
	return nil, err
}

func (p *parser) comparison() (node, error) {
	return p.chain(p.joined, "<>", "<=", ">=", "<", ">", "=")
}
func (p *parser) joined() (node, error)  { return p.chain(p.sum, "&") }
func (p *parser) sum() (node, error)     { return p.chain(p.product, "+", "-") }
func (p *parser) product() (node, error) { return p.chain(p.power, "*", "/") }
func (p *parser) power() (node, error)   { return p.chain(p.signed, "^") }

// signed binds the sign closer than the power, as spreadsheets do.
func (p *parser) signed() (node, error) {
	if p.take("-") == "" {
		return p.primary()
	}
	of, err := p.signed()
	return negative{of}, err
}

func (p *parser) primary() (node, error) {
	p.skip()
	if p.at >= len(p.text) {
		return nil, fmt.Errorf("it ends where a value is needed")
	}
	switch c := p.text[p.at]; {
	case c == '(':
		p.at++
		inner, err := p.comparison()
		if err == nil && p.take(")") == "" {
			err = fmt.Errorf("a closing bracket is missing")
		}
		return inner, err
	case c == '"':
		return p.quoted()
	case c >= '0' && c <= '9' || c == '.':
		return p.number()
	}
	return p.named()
}

func (p *parser) quoted() (node, error) {
	var b strings.Builder
	for i := p.at + 1; i < len(p.text); i++ {
		if p.text[i] != '"' {
			b.WriteByte(p.text[i])
			continue
		}
		if i+1 < len(p.text) && p.text[i+1] == '"' {
			b.WriteByte('"')
			i++
			continue
		}
		p.at = i + 1
		return constant{Text(b.String())}, nil
	}
	return nil, fmt.Errorf("a closing quotation mark is missing")
}

func (p *parser) number() (node, error) {
	end := p.at
	for end < len(p.text) {
		c := p.text[end]
		exponent := (c == '-' || c == '+') && (p.text[end-1] == 'E' || p.text[end-1] == 'e')
		if !(c >= '0' && c <= '9' || c == '.' || c == 'E' || c == 'e' || exponent) {
			break
		}
		end++
	}
	x, err := strconv.ParseFloat(p.text[p.at:end], 64)
	p.at = end
	return constant{Number(x)}, err
}

// named reads a function call, a reference or a defined name.
func (p *parser) named() (node, error) {
	sheet := ""
	if p.text[p.at] == '\'' {
		end := strings.Index(p.text[p.at+1:], "'!")
		if end < 0 {
			return nil, fmt.Errorf("%q is no name of a sheet", p.text[p.at:])
		}
		sheet = strings.ReplaceAll(p.text[p.at+1:p.at+1+end], "''", "'")
		p.at += end + 3
	}
	word := p.word()
	switch {
	case word == "":
		return nil, fmt.Errorf("%q is not understood", p.text[p.at:])
	case sheet == "" && p.take("(") != "":
		return p.call(word)
	}
	from, ok := cellOf(sheet, word)
	if !ok {
		if sheet != "" {
			return nil, fmt.Errorf("%q is no cell", word)
		}
		return name{word}, nil
	}
	if p.take(":") == "" {
		return reference{Range{from, from}}, nil
	}
	to, ok := cellOf(sheet, p.word())
	if !ok {
		return nil, fmt.Errorf("the second corner of a range is missing")
	}
	return reference{Range{from, to}}, nil
}

func (p *parser) word() string {
	start := p.at
	for p.at < len(p.text) && strings.ContainsRune("ABCDEFGHIJKLMNOPQRSTUVWXYZabcdefghijklmnopqrstuvwxyz0123456789_.$", rune(p.text[p.at])) {
		p.at++
	}
	return p.text[start:p.at]
}

func (p *parser) call(function string) (node, error) {
	c := call{name: function}
	if p.take(")") != "" {
		return c, nil
	}
	for {
		argument, err := p.comparison()
		if err != nil {
			return nil, err
		}
		c.arguments = append(c.arguments, argument)
		switch p.take(",", ")") {
		case ")":
			return c, nil
		case "":
			return nil, fmt.Errorf("a closing bracket of %s is missing", function)
		}
	}
}

// cellOf reads a reference such as $C$7.
func cellOf(sheet, word string) (Cell, bool) {
	word = strings.ReplaceAll(word, "$", "")
	col, i := 0, 0
	for ; i < len(word) && word[i] >= 'A' && word[i] <= 'Z' && i < 3; i++ {
		col = col*26 + int(word[i]-'A') + 1
	}
	row, err := strconv.Atoi(word[i:])
	return Cell{sheet, col, row}, i > 0 && err == nil && row > 0
}
