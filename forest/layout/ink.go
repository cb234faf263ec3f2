package layout

import "steelyard/meta/choice"

// Ink is the role of a colour. Each role has one colour per theme, so that a
// page can recolour a drawing by attribute selectors.
type Ink int

// The roles.
const (
	Ordinary     Ink = iota // text, axes, lines of no effect
	Soft                    // second text
	Paper                   // background, patches under text, hollow bars
	Estimate                // squares, diamonds, intervals
	Prediction              // prediction interval
	Evidence                // evidence bars and lines
	EvidenceNone            // evidence for no effect
	Probability             // posterior probability
	PriorBased              // curves that assume a prior
	Grid                    // grid lines
	Hairline                // lines between rows
	SpanRule                // rules under a head over several columns
	FunnelLine              // contour lines of a funnel
	PooledBand              // tint of the pooled row
	IntervalBand            // tint of an interval
	TrivialZone             // tint of effects too small to matter
	FunnelNone              // funnel band: evidence for none
	FunnelFaint             // funnel bands by word, up to massive
	FunnelFair
	FunnelFirm
	FunnelHeavy
	FunnelMassive
	inkCount
)

// Theme is a set of colours.
type Theme int

// The themes: colours on white paper, colours on a dark page (for screens
// only), and greys for journals that print without colour.
const (
	Light Theme = iota
	Dark
	Mono
)

var themeNames = choice.Of[Theme]("theme", "light", "dark", "mono")

// Themes returns the names of the themes.
func Themes() []string { return themeNames.All() }

// String returns the name of the theme.
func (t Theme) String() string { return themeNames.String(t) }

// UnmarshalText reads a theme's name.
func (t *Theme) UnmarshalText(text []byte) (err error) {
	*t, err = themeNames.Parse(string(text))
	return err
}

// palette holds the colours of each theme as #RRGGBB. The hues are those of
// Okabe and Ito, "Color Universal Design" (2008), which stay apart for readers
// with any common colour vision.
var palette = [...][inkCount]string{
	Light: {
		Ordinary: "#1A1A1A", Soft: "#595959", Paper: "#FFFFFF",
		Estimate: "#0072B2", Prediction: "#56B4E9", Evidence: "#D55E00", EvidenceNone: "#8C8C8C",
		Probability: "#009E73", PriorBased: "#CC79A7",
		Grid: "#D9D9D9", Hairline: "#E3E3E3", SpanRule: "#B3B3B3", FunnelLine: "#A6A6A6",
		PooledBand: "#EFF1F3", IntervalBand: "#DCEAF4", TrivialZone: "#E9E9E9",
		FunnelNone: "#FEFEFE", FunnelFaint: "#F7F7F7", FunnelFair: "#F0F0F0",
		FunnelFirm: "#E8E8E8", FunnelHeavy: "#E0E0E0", FunnelMassive: "#D7D7D7",
	},
	Dark: {
		Ordinary: "#E9E7E3", Soft: "#A8AFB5", Paper: "#14171A",
		Estimate: "#56B4E9", Prediction: "#0072B2", Evidence: "#D55E00", EvidenceNone: "#8C8C8C",
		Probability: "#009E73", PriorBased: "#CC79A7",
		Grid: "#343B41", Hairline: "#2A3035", SpanRule: "#59626A", FunnelLine: "#59626A",
		PooledBand: "#1E2327", IntervalBand: "#1B2F3C", TrivialZone: "#272D32",
		FunnelNone: "#15181B", FunnelFaint: "#1A1E21", FunnelFair: "#1F2428",
		FunnelFirm: "#252A2F", FunnelHeavy: "#2B3136", FunnelMassive: "#31383E",
	},
	Mono: {
		Ordinary: "#1A1A1A", Soft: "#4D4D4D", Paper: "#FFFFFF",
		Estimate: "#333333", Prediction: "#A8A8A8", Evidence: "#6B6B6B", EvidenceNone: "#BDBDBD",
		Probability: "#1A1A1A", PriorBased: "#8C8C8C",
		Grid: "#D9D9D9", Hairline: "#E3E3E3", SpanRule: "#B3B3B3", FunnelLine: "#A6A6A6",
		PooledBand: "#F0F0F0", IntervalBand: "#E6E6E6", TrivialZone: "#E9E9E9",
		FunnelNone: "#FEFEFE", FunnelFaint: "#F7F7F7", FunnelFair: "#F0F0F0",
		FunnelFirm: "#E8E8E8", FunnelHeavy: "#E0E0E0", FunnelMassive: "#D7D7D7",
	},
}

// Colour returns the colour of a role as #RRGGBB. A theme or role outside the
// known ones gives the ordinary ink of the light theme.
func (t Theme) Colour(ink Ink) string {
	if t < Light || t > Mono || ink < Ordinary || ink >= inkCount {
		return palette[Light][Ordinary]
	}
	return palette[t][ink]
}

// Resolve returns the paint as this theme draws it: in greys the bars for no
// effect get an outline, so that they do not fade into the paper.
func (t Theme) Resolve(p Paint) Paint {
	if t == Mono && p.Fill == EvidenceNone && p.OutlineWidth == 0 {
		p.Outline, p.OutlineWidth = Ordinary, 0.5
	}
	return p
}
