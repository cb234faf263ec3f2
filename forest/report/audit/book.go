package audit

import (
	"fmt"
	"math"
	"strconv"
	"strings"

	"github.com/xuri/excelize/v2"

	"steelyard/forest/report/audit/formula"
	"steelyard/meta/review"
)

// book is a workbook being written, with the values of its cells, so that formulas can
// be evaluated. It keeps the first error.
type book struct {
	f        *excelize.File
	sheets   []*sheet
	named    map[string]formula.Range
	styles   map[look]int
	drawings bool   // the program's own drawings are put in
	charts   []bool // of each chart, whether its horizontal axis is logarithmic
	fixed    int    // values that stand entered because a formula would not agree
	err      error
}

// sheet is a sheet of the book with what its cells hold.
type sheet struct {
	book *book
	name string
	rows [][]held
	tall []cell // cells whose text is wrapped

	noted []cell // cells with a note, in order
	notes map[cell]string
}

// held is a cell's content.
type held struct {
	value formula.Value
	live  bool // it holds a formula
}

// cell is the place of a cell that was written.
type cell struct {
	sheet    *sheet
	col, row int
}

// block is a range of cells of one sheet.
type block struct{ from, to cell }

func (b *book) do(err error) {
	if b.err == nil {
		b.err = err
	}
}

// sheet adds a sheet.
func (b *book) sheet(name string) *sheet {
	s := &sheet{book: b, name: name}
	if len(b.sheets) == 0 {
		b.do(b.f.SetSheetName("Sheet1", name))
	} else {
		_, err := b.f.NewSheet(name)
		b.do(err)
	}
	b.sheets = append(b.sheets, s)
	return s
}

// quoted is the sheet's name as formulas write it.
func (s *sheet) quoted() string { return "'" + strings.ReplaceAll(s.name, "'", "''") + "'!" }

func (s *sheet) at(col, row int) cell { return cell{s, col, row} }

// local is the cell's reference within its sheet, such as C7.
func (c cell) local() string { return review.ColumnLetters(c.col) + strconv.Itoa(c.row) }

// absolute is the cell's reference for a name: 'sheet'!$C$7.
func (c cell) absolute() string {
	return fmt.Sprintf("%s$%s$%d", c.sheet.quoted(), review.ColumnLetters(c.col), c.row)
}

// from is the reference as a formula of sheet s writes it.
func (c cell) from(s *sheet) string {
	if c.sheet == s {
		return c.local()
	}
	return c.sheet.quoted() + c.local()
}

func (r block) reference(s *sheet) string { return r.from.from(s) + ":" + r.to.local() }

// absolute is the range's reference for a name or a chart.
func (r block) absolute() string {
	return fmt.Sprintf("%s:$%s$%d", r.from.absolute(), review.ColumnLetters(r.to.col), r.to.row)
}

// number returns the number that a cell holds.
func (c cell) number() float64 { return c.sheet.get(c.col, c.row).Number }

// live reports whether a cell holds a formula.
func (c cell) live() bool { return c.sheet.rows[c.row-1][c.col-1].live }

func (s *sheet) get(col, row int) formula.Value {
	if row > len(s.rows) || col > len(s.rows[row-1]) {
		return formula.Value{}
	}
	return s.rows[row-1][col-1].value
}

func (s *sheet) hold(col, row int, h held) {
	for len(s.rows) < row {
		s.rows = append(s.rows, nil)
	}
	for len(s.rows[row-1]) < col {
		s.rows[row-1] = append(s.rows[row-1], held{})
	}
	s.rows[row-1][col-1] = h
}

// style gives a cell its look.
func (s *sheet) style(c cell, l look) {
	b := s.book
	id, have := b.styles[l]
	if !have {
		var err error
		id, err = b.f.NewStyle(l.style())
		b.do(err)
		b.styles[l] = id
	}
	b.do(b.f.SetCellStyle(s.name, c.local(), c.local(), id))
}

// text writes text that stays text, whatever it looks like.
func (s *sheet) text(col, row int, l look, text string) cell {
	c := s.at(col, row)
	if text != "" {
		s.book.do(s.book.f.SetCellStr(s.name, c.local(), clean(text)))
	}
	s.style(c, l)
	s.hold(col, row, held{value: formula.Text(clean(text))})
	if l.role == wrapped || l.role == head || l.role == headText || l.role == headSoft {
		s.tall = append(s.tall, c)
	}
	return c
}

// number writes a number with all its digits; infinite ones as words.
func (s *sheet) number(col, row int, l look, x float64) cell {
	c := s.at(col, row)
	if math.IsNaN(x) || math.IsInf(x, 0) {
		word := "not a number"
		if math.IsInf(x, 0) {
			word = map[bool]string{true: "infinite", false: "minus infinite"}[x > 0]
		}
		return s.text(col, row, l, word)
	}
	s.book.do(s.book.f.SetCellDefault(s.name, c.local(), strconv.FormatFloat(x, 'g', -1, 64)))
	s.style(c, l)
	s.hold(col, row, held{value: formula.Number(x)})
	return c
}

// entered writes a number that the program computed and no formula gives.
func (s *sheet) entered(col, row int, form format, x float64) cell {
	return s.number(col, row, look{entered, form}, x)
}

// formula writes a formula; cells and blocks among the arguments become references.
// A formula that cannot be evaluated is an error of the book.
func (s *sheet) formula(col, row int, l look, text string, arguments ...any) cell {
	c := s.at(col, row)
	text, v, err := s.evaluate(text, arguments)
	if err != nil {
		s.book.do(fmt.Errorf("%s%s: %w", s.quoted(), c.local(), err))
		return c
	}
	s.write(c, l, text, v)
	return c
}

func (s *sheet) write(c cell, l look, text string, v formula.Value) {
	s.book.do(s.book.f.SetCellFormula(s.name, c.local(), text))
	s.style(c, l)
	s.hold(c.col, c.row, held{value: v, live: true})
}

// live writes a formula that must give the program's own number want; where it does
// not, want is entered and marked. It reports whether the formula stands.
func (s *sheet) live(col, row int, form format, want float64, text string, arguments ...any) (cell, bool) {
	return s.lively(col, row, look{computed, form}, want, text, arguments...)
}

// key is live with the look of a result.
func (s *sheet) key(col, row int, form format, want float64, text string, arguments ...any) (cell, bool) {
	return s.lively(col, row, look{result, form}, want, text, arguments...)
}

func (s *sheet) lively(col, row int, l look, want float64, text string, arguments ...any) (cell, bool) {
	text, v, err := s.evaluate(text, arguments)
	if err == nil && !v.IsText && v.List == nil && agree(v.Number, want) {
		c := s.at(col, row)
		s.write(c, l, text, v)
		return c, true
	}
	s.book.fixed++
	c := s.entered(col, row, l.form, want)
	s.note(c, "Entered by the program: a formula would not give its value to nine digits here.")
	return c, false
}

// agree reports whether a formula's value is the program's to nine digits.
func agree(got, want float64) bool {
	return math.Abs(got-want) <= 1e-9*math.Abs(want)+1e-13
}

func (s *sheet) evaluate(text string, arguments []any) (string, formula.Value, error) {
	for i, a := range arguments {
		switch a := a.(type) {
		case cell:
			arguments[i] = a.from(s)
		case block:
			arguments[i] = a.reference(s)
		case float64:
			arguments[i] = strconv.FormatFloat(a, 'g', -1, 64)
		}
	}
	if len(arguments) > 0 {
		text = fmt.Sprintf(text, arguments...)
	}
	e, err := formula.Parse(text)
	if err != nil {
		return text, formula.Value{}, err
	}
	v, err := e.Evaluate(view{s})
	if err != nil {
		err = fmt.Errorf("%s: %w", text, err)
	}
	return text, v, err
}

// name gives a cell or a range a name for the whole workbook.
func (b *book) name(name string, r block) {
	refers := r.absolute()
	if r.from == r.to {
		refers = r.from.absolute()
	}
	b.do(b.f.SetDefinedName(&excelize.DefinedName{Name: name, RefersTo: refers}))
	b.named[name] = formula.Range{
		From: formula.Cell{Sheet: r.from.sheet.name, Col: r.from.col, Row: r.from.row},
		To:   formula.Cell{Sheet: r.to.sheet.name, Col: r.to.col, Row: r.to.row},
	}
}

// view is the book as formulas of one sheet see it.
type view struct{ sheet *sheet }

// Values returns the values of a range; see formula.Sheets.
func (v view) Values(r formula.Range) []formula.Value {
	s := v.sheet
	if r.From.Sheet != "" {
		for _, have := range s.book.sheets {
			if have.name == r.From.Sheet {
				s = have
			}
		}
	}
	var values []formula.Value
	for row := r.From.Row; row <= r.To.Row; row++ {
		for col := r.From.Col; col <= r.To.Col; col++ {
			values = append(values, s.get(col, row))
		}
	}
	return values
}

// Named returns the range of a defined name; see formula.Sheets.
func (v view) Named(name string) (formula.Range, bool) {
	r, ok := v.sheet.book.named[name]
	return r, ok
}
