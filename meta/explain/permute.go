package explain

import (
	"context"
	"encoding/binary"
	"fmt"
	"math/rand/v2"
	"runtime"
	"sync"
	"sync/atomic"

	"steelyard/meta"
)

// Permuted says how a permutation test was done.
type Permuted struct {
	Count int     // permutations looked at
	Exact bool    // they are all there are
	P     float64 // of all covariates together; those of the terms stand in Regression.Terms
}

// mostPermuted bounds the permutations that may be drawn.
const mostPermuted = 10_000_000

// exactUpTo is how many permutations are all looked at however few are asked for:
// those of 7 studies.
const exactUpTo = 5040

// permuteBlock is how many permutations share one stream of random numbers.
const permuteBlock = 64

// asGreat is how close, relative, an F counts as equal to the observed one, so that
// rounding does not tell equals apart.
const asGreat = 1e-9

// Permute gives the regression p-values from permutations: the studies' covariates,
// whole rows of them, are dealt anew among the estimates with their standard errors,
// τ² and all the rest fitted again, and it is counted how often F of a term, and of
// all terms, is as great as observed. All k! are looked at where these are no more
// than n or 5,040; else n are drawn, and the observed one counts among them:
// p = (1 + count)/(1 + n). Each p-value is of the hypothesis that no covariate has
// to do with the effects.
//
// The result is the same for a seed whatever the number of workers. It returns the
// first error of a fit, and the cause if ctx ends.
//
// Source: Higgins & Thompson (2004), Statistics in Medicine 23:1663-1682.
func (r *Regression) Permute(ctx context.Context, y, s []float64, d *Design, n int, seed uint64, work meta.Work) error {
	if n < 100 || n > mostPermuted {
		return &DesignError{"", fmt.Sprintf("%d permutations: give 100 to %d", n, mostPermuted)}
	}
	m, err := newSystem(y, s, d.Columns(), true)
	if err != nil {
		return err
	}
	p := &permuting{regression: r, terms: len(r.Terms), n: n, seed: seed}
	if all := factorial(m.k, max(n, exactUpTo)); all > 0 {
		p.exact, p.n = true, all
	}
	counts, err := p.run(ctx, m, work)
	if err != nil {
		return err
	}
	share := func(count int) float64 {
		if p.exact {
			return float64(count) / float64(p.n)
		}
		return float64(1+count) / float64(1+p.n)
	}
	for i := range r.Terms {
		r.Terms[i].PermutedP = share(counts[i])
	}
	r.Whole.PermutedP = share(counts[p.terms])
	r.Permutation = &Permuted{Count: p.n, Exact: p.exact, P: r.Whole.PermutedP}
	return nil
}

// factorial returns k!, or 0 where it is above a bound.
func factorial(k, bound int) int {
	all := 1
	for i := 2; i <= k; i++ {
		if all *= i; all > bound {
			return 0
		}
	}
	return all
}

// permuting is a permutation test under way.
type permuting struct {
	regression *Regression
	terms      int
	n          int
	exact      bool
	seed       uint64
}

// run counts, of each term and of all together, the permutations whose F is as great
// as observed.
func (p *permuting) run(ctx context.Context, m *system, work meta.Work) ([]int, error) {
	ctx, stop := context.WithCancelCause(ctx)
	defer stop(nil)
	blocks := (p.n + permuteBlock - 1) / permuteBlock
	workers := work.Workers
	if workers <= 0 {
		workers = runtime.GOMAXPROCS(0)
	}
	totals := make([]int, p.terms+1)
	done := 0
	var mutex sync.Mutex
	var next atomic.Int64
	var group sync.WaitGroup
	for range min(workers, blocks) {
		own := m.clone()
		group.Go(func() {
			counts := make([]int, len(totals))
			for ctx.Err() == nil {
				block := int(next.Add(1)) - 1
				if block >= blocks {
					return
				}
				clear(counts)
				from, to := block*permuteBlock, min(p.n, (block+1)*permuteBlock)
				if err := p.block(ctx, own, block, from, to, counts); err != nil {
					stop(err)
					return
				}
				mutex.Lock()
				for i, c := range counts {
					totals[i] += c
				}
				done += to - from
				if work.Progress != nil {
					work.Progress(done, p.n)
				}
				mutex.Unlock()
			}
		})
	}
	group.Wait()
	return totals, context.Cause(ctx)
}

// block looks at the permutations of one block.
func (p *permuting) block(ctx context.Context, m *system, block, from, to int, counts []int) error {
	var key [32]byte
	binary.LittleEndian.PutUint64(key[0:], p.seed)
	binary.LittleEndian.PutUint64(key[8:], uint64(block))
	random := rand.New(rand.NewChaCha8(key))
	perm := make([]int, m.k)
	for i := from; i < to && ctx.Err() == nil; i++ {
		if p.exact {
			nthPermutation(perm, i)
		} else {
			for j := range perm {
				perm[j] = j
			}
			random.Shuffle(m.k, func(a, b int) { perm[a], perm[b] = perm[b], perm[a] })
		}
		m.permute(perm)
		if err := p.count(m, counts); err != nil {
			return err
		}
	}
	return nil
}

// count fits the permuted system and counts each F that is as great as observed.
func (p *permuting) count(m *system, counts []int) error {
	tau2, err := m.estimate(p.regression.Model.Tau)
	if err != nil {
		return err
	}
	_, st := m.settle(p.regression.Model, tau2)
	for i := range counts {
		t := p.regression.Whole
		if i < p.terms {
			t = p.regression.Terms[i]
		}
		if f := st.quadratic(t.columnFrom, int(t.DF1)) / t.DF1; f >= t.F*(1-asGreat) {
			counts[i]++
		}
	}
	return nil
}

// nthPermutation writes the n-th permutation of 0 … len(perm)−1 in the order of the
// factorial number system, the identity first.
func nthPermutation(perm []int, n int) {
	for i := range perm {
		perm[i] = i
	}
	for i := range perm {
		rest := 1
		for j := 2; j < len(perm)-i; j++ {
			rest *= j
		}
		pick := i + n/rest%max(1, len(perm)-i)
		chosen := perm[pick]
		copy(perm[i+1:pick+1], perm[i:pick])
		perm[i] = chosen
		n %= rest
	}
}
