package layout

import (
	"steelyard/forest/words"
	"steelyard/meta/synthesis"
)

// UpdatesOf returns what the cumulative chart of a living review shows: a point for
// each update that brought studies, at equal distances, with what repeated looks show
// in a note. The outcome's cumulative analysis is that of AccrueByUpdate; the errors are
// those of CumulativeOf.
func UpdatesOf(s *synthesis.Synthesis, o *synthesis.Outcome, looks *synthesis.RepeatedLooks) (CumulativeInput, error) {
	in, err := CumulativeOf(s, o)
	if err != nil {
		return in, err
	}
	in.Title, in.Order = "Evidence at each update of the review", "updates that brought "+words.Noun(s, 2)+", by the date of their search"
	if text := words.RepeatedLooks(looks); text != "" {
		in.Notes[0] = Note{Head: "Repeated looks", Text: text}
	}
	return in, nil
}
