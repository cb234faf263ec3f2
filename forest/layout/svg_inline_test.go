package layout

import (
	"bytes"
	"encoding/xml"
	"regexp"
	"strings"
	"testing"
)

// TestInlineKeepsTextsAndPlaces: the form for a page holds every text of the image and
// every end of its lines, in fewer bytes.
func TestInlineKeepsTextsAndPlaces(t *testing.T) {
	d := mustForest(t, nineTrials(), ForestStyle{}).Pages[0]
	var image, page bytes.Buffer
	if err := WriteSVG(&image, d, Light); err != nil {
		t.Fatal(err)
	}
	if err := WriteInline(&page, d, "chart", ""); err != nil {
		t.Fatal(err)
	}
	texts := regexp.MustCompile(`>([^<>\n]+)<`)
	var want, got []string
	for _, m := range texts.FindAllStringSubmatch(image.String(), -1) {
		want = append(want, m[1])
	}
	for _, m := range texts.FindAllStringSubmatch(page.String(), -1) {
		got = append(got, m[1])
	}
	if strings.Join(got, "|") != strings.Join(want, "|") {
		t.Errorf("the texts are\n%v, want\n%v", got, want)
	}
	if page.Len() >= image.Len() {
		t.Errorf("%d bytes, the image has %d", page.Len(), image.Len())
	}
	if err := xml.Unmarshal(page.Bytes(), new(struct{})); err != nil {
		t.Errorf("not well formed: %v", err)
	}
}

// TestInlineJoinsLines: lines of one look are one path; one that begins where the other
// ends goes on from it, and a change of ink begins another.
func TestInlineJoinsLines(t *testing.T) {
	d := Drawing{ID: "d", Width: 10, Height: 10, Items: []Item{
		Line{X1: 1, Y1: 1, X2: 2, Y2: 3, Width: 1}, Line{X1: 2, Y1: 3, X2: 5, Y2: 3, Width: 1},
		Line{X1: 7, Y1: 1, X2: 7, Y2: 4, Width: 1}, Line{X1: 7, Y1: 4, X2: 8, Y2: 4, Width: 1, Ink: Grid},
	}}
	var out bytes.Buffer
	if err := WriteInline(&out, d, "chart", "other"); err != nil {
		t.Fatal(err)
	}
	for _, want := range []string{`<path d="M1 1L2 3H5M7 1V4" stroke="#1A1A1A"`, `<path d="M7 4H8" stroke="#D9D9D9"`, `aria-labelledby="other-title other-desc"`} {
		if !strings.Contains(out.String(), want) {
			t.Errorf("no %s in %s", want, out.String())
		}
	}
	if strings.Contains(out.String(), "<title") {
		t.Error("a drawing that another describes has a title of its own")
	}
}
