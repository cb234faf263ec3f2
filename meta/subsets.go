package meta

import (
	"context"
	"math"
	"math/bits"
	"math/rand/v2"
	"sync"

	"steelyard/meta/evidence"
)

const (
	// EverySubset is the largest number of studies of which every subset is taken.
	EverySubset = 24
	// defaultSample is how many subsets are drawn from more studies.
	defaultSample = 1 << 18
	// exactSubsets is the largest number of subsets whose values are all kept, for
	// exact quantiles.
	exactSubsets = 1 << 16
	// pilotSubsets is how many subsets fix the range of histograms and grids.
	pilotSubsets = 4096
	// subsetPiece is how many subsets one worker takes at a time.
	subsetPiece = 1024
)

// SubsetOptions says which subsets are taken and what is counted.
type SubsetOptions struct {
	Important *Limits // the trivial zone on the analysis scale; nil: not counted
	Chosen    *int    // a row whose subsets are counted apart, with and without it; nil for none
	Sample    int     // subsets drawn where there are more studies than 24; 0 means 262,144
	Seed      uint64  // of the draw
	Work      Work
}

// Subsets summarises the results over all subsets of the studies that hold at
// least one, each counting once, or over a sample drawn with equal chances.
type Subsets struct {
	K        int
	Count    int  // subsets taken
	Every    bool // all 2^k − 1; else a sample, drawn with replacement
	Failed   int  // of these, what could not be pooled: in no share and no grid
	Estimate Spread
	Steps    Spread // of the evidence for an effect
	Sides    Sides
	Words    []WordShare // by hypothesis, then from the strongest word for none to that for an effect
	Grid     *Grid
	With     *Grid // of the subsets with the chosen study; nil without one
	Without  *Grid
}

// Sides are shares of subsets by where their estimate lies.
type Sides struct {
	BelowNull, AboveNull float64
	BelowZone, AboveZone *float64 // beyond the important difference; nil without one
}

// WordShare is the share of subsets whose evidence has a word.
type WordShare struct {
	Favours evidence.Hypothesis
	Word    evidence.Word
	Share   float64
}

// AllSubsets pools every subset of up to 24 studies and a seeded sample of more.
// The result is the same for any number of workers, the memory needed does not
// grow with the number of subsets. Quantiles are exact up to 65,536 subsets; see
// Spread for more.
//
// DerSimonian–Laird and common-effect models with a Wald or Hartung–Knapp
// interval are pooled from sums over the two halves of the studies, all others by
// refitting. It returns the error of pooling all studies, and the cause if ctx
// ends.
func AllSubsets(ctx context.Context, r Refit, options SubsetOptions) (*Subsets, error) {
	all, err := r.Mean(allRows(r.K()))
	if err != nil {
		return nil, err
	}
	q := newSubsetQuest(r, options)
	scouts := q.scouts()
	kept, err := q.measure(ctx, r, scouts)
	if err != nil {
		return nil, err
	}
	estimate, steps := rangeOf(kept, all)
	total := newTally(estimate, steps, options)
	if q.count <= exactSubsets {
		var room []int
		for i, p := range kept {
			set := scouts(i, room)
			total.add(p, q.holdsChosen(set))
			room = set.rows
		}
	} else if err := q.tally(ctx, r, total); err != nil {
		return nil, err
	}
	result := total.summary()
	result.K, result.Count, result.Every = q.k, q.count, q.every
	if q.count <= exactSubsets {
		result.Estimate, result.Steps = exactSpreads(kept)
	}
	return result, nil
}

// subsetQuest is the question which subsets to take and how to pool them.
type subsetQuest struct {
	k, count int
	every    bool
	options  SubsetOptions
	sums     *subsetSums // nil where only refitting will do
}

func newSubsetQuest(r Refit, options SubsetOptions) *subsetQuest {
	q := &subsetQuest{k: r.K(), options: options, every: r.K() <= EverySubset, count: SubsetCount(r.K(), options.Sample)}
	if q.every {
		q.sums = newSubsetSums(r)
	}
	return q
}

// SubsetCount returns how many subsets of k studies AllSubsets takes; sample is that
// of SubsetOptions.
func SubsetCount(k, sample int) int {
	switch {
	case k <= EverySubset:
		return 1<<k - 1
	case sample > 0:
		return sample
	}
	return defaultSample
}

// subset is one set of studies: bits where every subset is taken, rows else.
type subset struct {
	mask uint32
	rows []int
}

// subsetPoint is what is kept of one subset's result.
type subsetPoint struct {
	estimate, statistic, ln float64
	failed                  bool
}

// pick returns the subset of an index; rows are written into room.
type pick func(i int, room []int) subset

// at returns the subset of an index: 0 … count − 1. A sampled one is drawn from
// the index alone, by fair coins, again while no study is in it.
func (q *subsetQuest) at(i int, room []int) subset {
	if q.every {
		return subset{mask: uint32(i) + 1}
	}
	var source rand.PCG
	source.Seed(q.options.Seed, uint64(i))
	rows := room[:0]
	for len(rows) == 0 {
		for from := 0; from < q.k; from += 64 {
			word := source.Uint64()
			if rest := q.k - from; rest < 64 {
				word &= 1<<rest - 1
			}
			for ; word != 0; word &= word - 1 {
				rows = append(rows, from+bits.TrailingZeros64(word))
			}
		}
	}
	return subset{rows: rows}
}

// scouts returns the subsets that fix the range: all of them where they are few,
// else the first of a sample, or as many drawn ones.
func (q *subsetQuest) scouts() pick {
	if q.count <= exactSubsets || !q.every {
		return q.at
	}
	masks := make([]uint32, pilotSubsets)
	var source rand.PCG
	source.Seed(q.options.Seed, uint64(q.k))
	for i := range masks {
		for masks[i] == 0 {
			masks[i] = uint32(source.Uint64()) & (1<<q.k - 1)
		}
	}
	return func(i int, _ []int) subset { return subset{mask: masks[i]} }
}

// measure pools the subsets that fix the range.
func (q *subsetQuest) measure(ctx context.Context, r Refit, scouts pick) ([]subsetPoint, error) {
	n := min(q.count, pilotSubsets)
	work := q.options.Work
	if q.count <= exactSubsets {
		n = q.count
	} else {
		work.Progress = nil
	}
	points := make([]subsetPoint, n)
	err := q.inPieces(ctx, r, n, work, func(p *subsetPooler, i int) { points[i] = p.pool(p.take(scouts, i)) })
	return points, err
}

// tally pools all subsets and counts them, each worker for itself.
func (q *subsetQuest) tally(ctx context.Context, r Refit, total *tally) error {
	var mutex sync.Mutex
	var tallies []*tally
	err := q.inPieces(ctx, r, q.count, q.options.Work, func(p *subsetPooler, i int) {
		if p.own == nil {
			p.own = total.empty()
			mutex.Lock()
			tallies = append(tallies, p.own)
			mutex.Unlock()
		}
		set := p.take(q.at, i)
		p.own.add(p.pool(set), q.holdsChosen(set))
	})
	for _, own := range tallies {
		total.merge(own)
	}
	return err
}

// inPieces runs do for 0 … n−1, piece by piece, each worker with its own pooler.
func (q *subsetQuest) inPieces(ctx context.Context, r Refit, n int, work Work, do func(p *subsetPooler, i int)) error {
	pieces := (n + subsetPiece - 1) / subsetPiece
	if told := work.Progress; told != nil {
		work.Progress = func(done, _ int) { told(min(n, done*subsetPiece), n) }
	}
	return work.each(ctx, &subsetPooler{Refit: r, sums: q.sums}, pieces, func(r Refit, piece int) {
		p := r.(*subsetPooler)
		for i := piece * subsetPiece; i < min(n, (piece+1)*subsetPiece) && !p.stopped(ctx, i); i++ {
			do(p, i)
		}
	})
}

func (q *subsetQuest) holdsChosen(s subset) bool {
	if q.options.Chosen == nil {
		return false
	}
	if s.rows == nil {
		return s.mask>>*q.options.Chosen&1 == 1
	}
	for _, row := range s.rows {
		if row == *q.options.Chosen {
			return true
		}
	}
	return false
}

// subsetPooler pools subsets one after another: from sums where it can.
type subsetPooler struct {
	Refit
	sums *subsetSums
	rows []int
	own  *tally // of this worker; nil until it counts
}

// take returns the subset of an index, which is valid until the next.
func (p *subsetPooler) take(from pick, i int) subset {
	set := from(i, p.rows)
	if set.rows != nil {
		p.rows = set.rows
	}
	return set
}

// Clone returns a pooler for another goroutine; the sums are only read.
func (p *subsetPooler) Clone() Refit { return &subsetPooler{Refit: p.Refit.Clone(), sums: p.sums} }

// stopped looks at ctx before each refit, and now and then among sums.
func (p *subsetPooler) stopped(ctx context.Context, i int) bool {
	return (p.sums == nil || i%256 == 0) && ctx.Err() != nil
}

func (p *subsetPooler) pool(s subset) subsetPoint {
	rows := s.rows
	if rows == nil {
		if p.sums != nil {
			if point, ok := p.sums.pool(s.mask); ok {
				return point
			}
		}
		p.rows = rowsOf(p.rows[:0], s.mask)
		rows = p.rows
	}
	mean, err := point(p.Refit, rows)
	if err != nil {
		return subsetPoint{failed: true}
	}
	return subsetPoint{estimate: mean.Estimate, statistic: mean.Statistic, ln: mean.Evidence.Ln()}
}

// rowsOf appends the rows whose bits are set.
func rowsOf(rows []int, mask uint32) []int {
	for ; mask != 0; mask &= mask - 1 {
		rows = append(rows, bits.TrailingZeros32(mask))
	}
	return rows
}

// rangeOf returns the ranges of estimate and steps over the points, with a margin
// on both sides; the result of all studies lies inside.
func rangeOf(points []subsetPoint, all Mean) (estimate, steps Limits) {
	estimate, steps = Limits{all.Estimate, all.Estimate}, Limits{all.Evidence.Steps(), all.Evidence.Steps()}
	for _, p := range points {
		if !p.failed {
			estimate.hold(p.estimate)
			steps.hold(evidence.FromLn(p.ln).Steps())
		}
	}
	return estimate.padded(), steps.padded()
}

// hold widens the limits to hold x.
func (l *Limits) hold(x float64) { l.Low, l.High = min(l.Low, x), max(l.High, x) }

// padded returns the limits with a margin of 2 %, and never without width.
func (l Limits) padded() Limits {
	margin := max(0.02*(l.High-l.Low), 1e-9*max(math.Abs(l.Low), math.Abs(l.High)))
	if !(margin > 0) {
		margin = 1e-9
	}
	return Limits{l.Low - margin, l.High + margin}
}
