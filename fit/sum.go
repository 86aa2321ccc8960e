package fit

import (
	"sync"

	"gonum.org/v1/gonum/mat"
)

// This file adds up −ln L over the rows. The rows are cut into blocks whose number
// depends on the numbers of rows and of parameters alone; blocks are added in order, so that the sum
// is the same to the last bit on any number of processors.

const (
	rowsPerBlock = 128
	mostBlocks   = 16 // each holds a curvature matrix
)

// block is the sum over a part of the rows.
type block struct {
	value float64
	grad  []float64
	curv  *mat.SymDense
}

// addRows returns Σ nll over the rows with residuals r(i), and adds the derivatives
// with respect to θ to grad and curv where these are not nil.
func (l *likelihood) addRows(noise *law, r func(i int) float64, variance []float64, grad []float64, curv *mat.SymDense, kind curvature) float64 {
	n := len(l.obs)
	if len(grad) == 0 { // nothing to derive by
		grad, curv = nil, nil
	}
	add := func(b *block, lo, hi int) {
		for i := lo; i < hi; i++ {
			d := l.density(noise, i, r(i), variance[i])
			b.value += d.nll
			if b.grad != nil {
				// r = measured − T(θ) − offset
				l.addRow(i, -d.dr, d.curvature(kind), b.grad, b.curv)
			}
		}
	}
	// Adding up a matrix of p² elements takes as long as p²/100 rows.
	count := min(mostBlocks, n/max(rowsPerBlock, len(grad)*len(grad)/100))
	if count < 2 {
		b := block{grad: grad, curv: curv}
		add(&b, 0, n)
		return b.value
	}
	l.prepareBlocks(count, len(grad))
	workers := min(l.workers, count)
	var wg sync.WaitGroup
	for w := range workers {
		wg.Add(1)
		go func() {
			defer wg.Done()
			for k := w; k < count; k += workers {
				b := block{}
				if grad != nil {
					b.grad = l.blocks[k].grad
					clear(b.grad)
				}
				if curv != nil {
					b.curv = l.blocks[k].curv
					b.curv.Zero()
				}
				add(&b, k*n/count, (k+1)*n/count)
				l.blocks[k].value = b.value
			}
		}()
	}
	wg.Wait()
	value := 0.0
	for k := range count {
		b := &l.blocks[k]
		value += b.value
		for i := range grad {
			grad[i] += b.grad[i]
		}
		if curv != nil {
			curv.AddSym(curv, b.curv)
		}
	}
	return value
}

// prepareBlocks makes room for the sums over p parameters.
func (l *likelihood) prepareBlocks(count, p int) {
	if len(l.blocks) != count {
		l.blocks = make([]block, count)
	}
	if p == 0 || len(l.blocks[0].grad) == p {
		return
	}
	for k := range l.blocks {
		l.blocks[k].grad, l.blocks[k].curv = make([]float64, p), mat.NewSymDense(p, nil)
	}
}
