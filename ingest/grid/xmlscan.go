package grid

import (
	"bytes"
	"encoding/xml"
	"fmt"
	"io"
	"unicode"
	"unicode/utf8"
)

// maxTokenBytes is the length of the longest tag or text within a part.
const maxTokenBytes = 2 << 20

// tokenKind is the kind of a token of XML.
type tokenKind int

const (
	noToken tokenKind = iota
	startToken
	endToken
	textToken
)

// xmlScanner cuts XML into tokens. It is as strict as encoding/xml, to which the
// tests hold it, and about six times as fast, since a token is looked at where it
// lies in the buffer. Comments and processing instructions are passed over; document
// types are refused. An element without content gives a start and an end.
type xmlScanner struct {
	r       io.Reader
	buf     []byte
	pos     int // start of the token being read
	end     int // of what the buffer holds
	line    int // line ends before the buffer
	open    []string
	spaces  []spaceBinding
	element xml.StartElement // of a startToken; its attributes are valid until the next token
	text    []byte           // of a textToken; valid until the next token
	scratch []byte
	names   map[string]string // names and short values met, so that they are kept once
	empty   bool              // the element just begun ends at once
}

// spaceBinding is a prefix declared to mean a namespace by an open element.
type spaceBinding struct {
	prefix, space string
	depth         int
}

func newXMLScanner(r io.Reader) *xmlScanner {
	return &xmlScanner{r: r, buf: make([]byte, 32<<10), names: map[string]string{}}
}

// errTokenTooLong says that a token is longer than maxTokenBytes.
var errTokenTooLong = fmt.Errorf("holds a single value of more than %d MB", maxTokenBytes>>20)

// syntax returns an error about the token being read.
func (s *xmlScanner) syntax(format string, args ...any) error {
	return &xml.SyntaxError{Msg: fmt.Sprintf(format, args...), Line: 1 + s.line + bytes.Count(s.buf[:s.pos], []byte("\n"))}
}

// next returns the next token; at the end io.EOF, and a syntax error if elements
// are still open there.
func (s *xmlScanner) next() (tokenKind, error) {
	if s.empty {
		s.empty = false
		s.leave()
		return endToken, nil
	}
	for {
		kind, err := s.step()
		if kind != noToken || err != nil {
			return kind, err
		}
	}
}

// step reads one piece of XML, of which some are no tokens.
func (s *xmlScanner) step() (tokenKind, error) {
	if s.pos == s.end {
		err := s.more()
		if err == io.EOF && len(s.open) > 0 {
			return noToken, s.syntax("unexpected EOF")
		}
		if err != nil {
			return noToken, err
		}
	}
	if s.buf[s.pos] != '<' {
		return s.readText()
	}
	c, err := s.byteAt(1)
	if err != nil {
		return noToken, err
	}
	switch c {
	case '/':
		return s.readEnd()
	case '?':
		return s.readInstruction()
	case '!':
		return s.readDeclaration()
	}
	return s.readStart()
}

// more reads on; it moves the token being read to the start of the buffer.
func (s *xmlScanner) more() error {
	if s.pos > 0 {
		s.line += bytes.Count(s.buf[:s.pos], []byte("\n"))
		copy(s.buf, s.buf[s.pos:s.end])
		s.end -= s.pos
		s.pos = 0
	}
	if s.end == len(s.buf) {
		if len(s.buf) >= maxTokenBytes {
			return errTokenTooLong
		}
		s.buf = append(s.buf, make([]byte, len(s.buf))...)
	}
	for {
		n, err := s.r.Read(s.buf[s.end:])
		s.end += n
		if n > 0 {
			return nil
		}
		if err != nil {
			return err
		}
	}
}

// byteAt returns the byte i places after the start of the token, where the XML may
// not end.
func (s *xmlScanner) byteAt(i int) (byte, error) {
	for s.pos+i >= s.end {
		err := s.more()
		if err == io.EOF {
			return 0, s.syntax("unexpected EOF")
		}
		if err != nil {
			return 0, err
		}
	}
	return s.buf[s.pos+i], nil
}

// until returns the token up to and with the first end after from bytes, and moves
// on behind it.
func (s *xmlScanner) until(from int, end string) ([]byte, error) {
	for {
		if _, err := s.byteAt(from + len(end) - 1); err != nil {
			return nil, err
		}
		if i := bytes.Index(s.buf[s.pos+from:s.end], []byte(end)); i >= 0 {
			return s.take(from + i + len(end)), nil
		}
		from = s.end - s.pos - len(end) + 1
	}
}

// take returns the next n bytes, which the buffer holds, and moves on behind them.
func (s *xmlScanner) take(n int) []byte {
	token := s.buf[s.pos : s.pos+n]
	s.pos += n
	return token
}

// readText reads up to the next tag.
func (s *xmlScanner) readText() (tokenKind, error) {
	n := 0
	for {
		if i := bytes.IndexByte(s.buf[s.pos+n:s.end], '<'); i >= 0 {
			n += i
			break
		}
		n = s.end - s.pos
		if err := s.more(); err == io.EOF {
			break
		} else if err != nil {
			return noToken, err
		}
	}
	text, err := s.decode(s.take(n), characterData)
	s.text = text
	return textToken, err
}

// readEnd reads the end of an element.
func (s *xmlScanner) readEnd() (tokenKind, error) {
	tag, err := s.until(2, ">")
	if err != nil {
		return noToken, err
	}
	name := bytes.TrimRight(tag[2:len(tag)-1], " \t\r\n")
	switch {
	case len(s.open) == 0:
		return noToken, s.syntax("unexpected end element </%.40s>", name)
	case s.open[len(s.open)-1] != string(name):
		return noToken, s.syntax("element <%.40s> closed by </%.40s>", s.open[len(s.open)-1], name)
	}
	s.leave()
	return endToken, nil
}

// leave closes the innermost element and forgets the prefixes that it declared.
func (s *xmlScanner) leave() {
	for n := len(s.spaces); n > 0 && s.spaces[n-1].depth == len(s.open); n-- {
		s.spaces = s.spaces[:n-1]
	}
	s.open = s.open[:len(s.open)-1]
}

// readInstruction passes over a processing instruction; a declaration of XML must
// be of version 1.0 and of UTF-8.
func (s *xmlScanner) readInstruction() (tokenKind, error) {
	instruction, err := s.until(2, "?>")
	if err != nil {
		return noToken, err
	}
	target, content := cutName(instruction[2 : len(instruction)-2])
	if !isName(target) {
		return noToken, s.syntax("expected target name after <?")
	}
	if string(target) != "xml" {
		return noToken, nil
	}
	if version := declared(content, "version"); version != "" && version != "1.0" {
		return noToken, s.syntax("unsupported version %.20q; only version 1.0 is supported", version)
	}
	if encoding := declared(content, "encoding"); encoding != "" && !bytes.EqualFold([]byte(encoding), []byte("utf-8")) {
		return noToken, s.syntax("unsupported encoding %.20q; only UTF-8 is supported", encoding)
	}
	return noToken, nil
}

// declared returns the quoted value of a word of the declaration of XML, blank if
// there is none.
func declared(content []byte, word string) string {
	for found := true; found; {
		_, content, found = bytes.Cut(content, []byte(word+"="))
		if found && len(content) > 0 && (content[0] == '"' || content[0] == '\'') {
			value, _, closed := bytes.Cut(content[1:], content[:1])
			if !closed {
				return ""
			}
			return string(value)
		}
	}
	return ""
}

// readDeclaration passes over a comment, reads a section of plain text, and refuses
// everything else that begins with "<!".
func (s *xmlScanner) readDeclaration() (tokenKind, error) {
	c, err := s.byteAt(2)
	switch {
	case err != nil:
		return noToken, err
	case c == '-':
		return s.readComment()
	case c != '[':
		return noToken, errDocumentType
	}
	const opening = "<![CDATA["
	if _, err := s.byteAt(len(opening) - 1); err != nil {
		return noToken, err
	}
	if string(s.buf[s.pos:s.pos+len(opening)]) != opening {
		return noToken, s.syntax("invalid <![ sequence")
	}
	section, err := s.until(len(opening), "]]>")
	if err != nil {
		return noToken, err
	}
	s.text, err = s.decode(section[len(opening):len(section)-3], plainSection)
	return textToken, err
}

// errDocumentType refuses what could define entities or ask for other files.
var errDocumentType = fmt.Errorf("declares a document type, which no workbook needs")

// readComment passes over a comment.
func (s *xmlScanner) readComment() (tokenKind, error) {
	if c, err := s.byteAt(3); err != nil {
		return noToken, err
	} else if c != '-' {
		return noToken, s.syntax("invalid sequence <!- not part of <!--")
	}
	if _, err := s.until(4, "--"); err != nil {
		return noToken, err
	}
	if s.pos == s.end { // the closing bracket is a byte of its own to be read
		if err := s.more(); err == io.EOF {
			return noToken, s.syntax("unexpected EOF")
		} else if err != nil {
			return noToken, err
		}
	}
	if s.take(1)[0] != '>' {
		return noToken, s.syntax(`invalid sequence "--" not allowed in comments`)
	}
	return noToken, nil
}

// readStart reads the start of an element.
func (s *xmlScanner) readStart() (tokenKind, error) {
	quote := byte(0)
	n := 1
	for ; ; n++ {
		c, err := s.byteAt(n)
		if err != nil {
			return noToken, err
		}
		if c == '>' && quote == 0 {
			break
		}
		switch {
		case c == '<':
			return noToken, s.syntax("a tag or a value in it holds <")
		case quote == 0 && (c == '"' || c == '\''):
			quote = c
		case c == quote:
			quote = 0
		}
	}
	tag := s.take(n + 1)
	tag = tag[1 : len(tag)-1]
	if tag, s.empty = bytes.CutSuffix(tag, []byte("/")); len(tag) == 0 {
		return noToken, s.syntax("expected element name after <")
	}
	name, rest := cutName(tag)
	if !isName(name) {
		return noToken, s.syntax("expected element name after <")
	}
	s.open = append(s.open, s.keep(name))
	if err := s.readAttributes(rest); err != nil {
		return noToken, err
	}
	s.element.Name = splitName(s.open[len(s.open)-1])
	s.element.Name.Space = s.space(s.element.Name.Space)
	for i := range s.element.Attr {
		if a := &s.element.Attr[i]; a.Name.Space != "" {
			a.Name.Space = s.space(a.Name.Space)
		}
	}
	return startToken, nil
}

// cutName parts a name from what follows it.
func cutName(b []byte) (name, rest []byte) {
	for i, c := range b {
		if !(isLetter(c) || '0' <= c && c <= ':' || c == '-' || c == '.' || c >= utf8.RuneSelf) {
			return b[:i], b[i:]
		}
	}
	return b, nil
}

// readAttributes reads the attributes of a start, with prefixes in place of
// namespaces, and notes the prefixes that they declare.
func (s *xmlScanner) readAttributes(b []byte) error {
	s.element.Attr = s.element.Attr[:0]
	for {
		b = bytes.TrimLeft(b, " \t\r\n")
		if len(b) == 0 {
			return nil
		}
		name, rest := cutName(b)
		if !isName(name) {
			return s.syntax("expected attribute name in element")
		}
		rest = bytes.TrimLeft(rest, " \t\r\n")
		if len(rest) == 0 || rest[0] != '=' {
			return s.syntax("attribute name without = in element")
		}
		rest = bytes.TrimLeft(rest[1:], " \t\r\n")
		if len(rest) == 0 || rest[0] != '"' && rest[0] != '\'' {
			return s.syntax("unquoted or missing attribute value in element")
		}
		end := bytes.IndexByte(rest[1:], rest[0])
		if end < 0 {
			return s.syntax("attribute value without end in element")
		}
		value, err := s.decode(rest[1:1+end], attributeValue)
		if err != nil {
			return err
		}
		s.attribute(xml.Attr{Name: splitName(s.keep(name)), Value: s.keep(value)})
		if len(s.spaces) > MaxNamespaces {
			return s.syntax("more than %d namespaces declared", MaxNamespaces)
		}
		b = rest[end+2:]
	}
}

// attribute adds an attribute to the element; a declaration of a prefix counts too.
func (s *xmlScanner) attribute(a xml.Attr) {
	s.element.Attr = append(s.element.Attr, a)
	switch {
	case a.Name.Space == "" && a.Name.Local == "xmlns":
		s.spaces = append(s.spaces, spaceBinding{"", a.Value, len(s.open)})
	case a.Name.Space == "xmlns":
		s.spaces = append(s.spaces, spaceBinding{a.Name.Local, a.Value, len(s.open)})
	}
}

// keep returns b as a string; short ones are kept once.
func (s *xmlScanner) keep(b []byte) string {
	const short, most = 32, 1024
	if text, known := s.names[string(b)]; known {
		return text
	}
	text := string(b)
	if len(text) <= short && len(s.names) < most {
		s.names[text] = text
	}
	return text
}

// splitName parts a prefix from a name.
func splitName(name string) xml.Name {
	for i := 0; i < len(name); i++ {
		if name[i] == ':' && i > 0 && i < len(name)-1 {
			return xml.Name{Space: name[:i], Local: name[i+1:]}
		}
	}
	return xml.Name{Local: name}
}

// space returns the namespace of a prefix, or the prefix if it has none.
func (s *xmlScanner) space(prefix string) string {
	switch prefix { // these two are not for the file to declare
	case "xml":
		return "http://www.w3.org/XML/1998/namespace"
	case "xmlns":
		return prefix
	}
	for i := len(s.spaces) - 1; i >= 0; i-- {
		if s.spaces[i].prefix == prefix {
			return s.spaces[i].space
		}
	}
	return prefix
}

// isName reports whether b is a name of XML with at most one colon.
func isName(b []byte) bool {
	colons := 0
	for i := 0; i < len(b); {
		c := b[i]
		switch {
		case isLetter(c):
		case c == ':':
			colons++
		case i > 0 && ('0' <= c && c <= '9' || c == '-' || c == '.'):
		case c >= utf8.RuneSelf:
			r, size := utf8.DecodeRune(b[i:])
			if !(unicode.IsLetter(r) || i > 0 && (unicode.IsDigit(r) || unicode.IsMark(r))) {
				return false
			}
			i += size - 1
		default:
			return false
		}
		i++
	}
	return len(b) > 0 && colons <= 1
}

func isLetter(c byte) bool { return 'a' <= c|0x20 && c|0x20 <= 'z' || c == '_' }
