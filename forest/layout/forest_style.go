package layout

// metrics are the sizes of a forest chart that follow from its width and its
// number of rows, in points.
type metrics struct {
	row, head, second, note float64 // type sizes
	lead                    float64 // of the notes, in multiples of their size
	pitch                   float64 // from row to row
	square                  float64 // side of the largest marker
	bar, pooledBar          float64 // heights on the rail
	margin                  float64
	grouped                 bool // a gap and a hairline every five rows, not under each row
	twoLine                 bool // numbers under the name and under the bar
}

// groupGap is the extra space after every five rows of a grouped chart.
const groupGap = 3.2

// wideMetrics returns the sizes for rows of one line; k is the number of rows on
// the chart.
func wideMetrics(k int, typeSize float64) metrics {
	m := metrics{row: 7.5, pitch: 13, lead: 1.36, margin: 3, pooledBar: 8}
	switch {
	case k > 48:
		m.row, m.pitch, m.grouped = 7, 11, true
	case k > 40:
		m.row, m.pitch, m.grouped = 6.5, 9, true
	case k > 20:
		m.row, m.pitch, m.grouped = 7, 11, true
	}
	if typeSize > 0 {
		m.pitch *= typeSize / m.row
		m.row = typeSize
	}
	m.head, m.second, m.note = max(minType, 0.94*m.row), max(minType, 0.9*m.row), max(minType, 0.9*m.row)
	m.square = min(9, 0.78*m.pitch)
	m.bar = min(5.2, 0.44*m.pitch)
	return m
}

// narrowMetrics returns the sizes for rows of two lines.
func narrowMetrics(typeSize float64) metrics {
	m := metrics{row: 7.25, lead: 1.34, margin: 2.5, pooledBar: 7.4, bar: 5, twoLine: true}
	if typeSize > 0 {
		m.row = typeSize
	}
	m.pitch = 2.68 * m.row
	m.head, m.second, m.note = max(minType, 0.94*m.row), max(minType, 0.9*m.row), max(minType, 0.9*m.row)
	m.square = 1.13 * m.row
	return m
}

// baseline is the offset of a row's text below the centre of the row.
func baseline(size float64) float64 { return 0.34 * size }
