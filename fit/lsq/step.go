package lsq

import (
	"math"
	"slices"

	"gonum.org/v1/gonum/blas"
	"gonum.org/v1/gonum/blas/blas64"
	"gonum.org/v1/gonum/floats"
	"gonum.org/v1/gonum/mat"
)

// triangle is ½‖A z + b‖² reduced by orthogonal transformations to
// ½‖R z + c‖² + a constant, with R upper triangular.
type triangle struct {
	r *mat.TriDense
	c []float64
}

// reduce factors [A b] = Q [R c; 0 ρ]. With b as one more column Qᵀb comes
// with R, and Q is never formed. A may have fewer rows than columns.
func reduce(a mat.Matrix, b []float64) triangle {
	m, n := a.Dims()
	ab := mat.NewDense(max(m, n+1), n+1, nil)
	ab.Slice(0, m, 0, n).(*mat.Dense).Copy(a)
	ab.Slice(0, m, n, n+1).(*mat.Dense).Copy(mat.NewVecDense(m, b))
	var qr mat.QR
	qr.Factorize(ab)
	var full mat.Dense
	qr.RTo(&full)
	t := triangle{r: mat.NewTriDense(n, mat.Upper, nil), c: make([]float64, n)}
	for i := range n {
		for j := i; j < n; j++ {
			t.r.SetTri(i, j, full.At(i, j))
		}
		t.c[i] = full.At(i, n)
	}
	return t
}

// damp reduces ‖R z + c‖² + µ‖z‖², given root = √µ.
func (t triangle) damp(root float64) triangle {
	if root == 0 {
		return t
	}
	n := len(t.c)
	a := mat.NewDense(2*n, n, nil)
	a.Slice(0, n, 0, n).(*mat.Dense).Copy(t.r)
	for j := range n {
		a.Set(n+j, j, root)
	}
	b := make([]float64, 2*n)
	copy(b, t.c)
	return reduce(a, b)
}

// minimum returns z = −R⁻¹c.
func (t triangle) minimum() []float64 {
	z := make([]float64, len(t.c))
	floats.SubTo(z, z, t.c)
	t.solve(blas.NoTrans, z)
	return z
}

// solve overwrites v with R⁻¹v, or R⁻ᵀv when transposed.
func (t triangle) solve(transposed blas.Transpose, v []float64) {
	blas64.Trsv(transposed, t.r.RawTriangular(), blas64.Vector{N: len(v), Inc: 1, Data: v})
}

// dependent reports whether R is so near to singular that R⁻¹c is rounding
// noise.
func (t triangle) dependent() bool {
	smallest, largest := math.Inf(1), 0.0
	for i := range t.c {
		d := math.Abs(t.r.At(i, i))
		smallest, largest = math.Min(smallest, d), math.Max(largest, d)
	}
	return smallest <= 1e-13*largest
}

// leastRoot returns the smallest √µ worth using: 0, or when columns are
// dependent one that keeps the step along their common direction short and
// disturbs the others by some 1e-14.
func (t triangle) leastRoot() float64 {
	if !t.dependent() {
		return 0
	}
	largest := 0.0
	for j := range t.c {
		largest = math.Max(largest, norm(mat.Col(nil, j, t.r)))
	}
	return 1e-7 * largest
}

// gradient returns Rᵀc, the gradient of ½‖R z + c‖² at z = 0.
func (t triangle) gradient() []float64 {
	g := mat.NewVecDense(len(t.c), nil)
	g.MulVec(t.r.T(), mat.NewVecDense(len(t.c), t.c))
	return g.RawVector().Data
}

// reduction returns the decrease of ½‖R z + c‖² from 0 to z, and the slope
// cᵀR z at 0.
func (t triangle) reduction(z []float64) (decrease, slope float64) {
	w := mat.NewVecDense(len(z), nil)
	w.MulVec(t.r, mat.NewVecDense(len(z), z))
	slope = floats.Dot(t.c, w.RawVector().Data)
	return -slope - mat.Dot(w, w)/2, slope
}

// move is a step in z with the √µ that gave it.
type move struct {
	z         []float64
	root      float64
	full      bool    // the trust radius did not limit it
	potential float64 // reduction predicted for the full step
}

// trust returns the minimiser of ‖R z + c‖ with ‖z‖ ≤ radius. The iteration on
// µ is that of Moré (1977), section 5, begun at √µ = root, that of the step
// before.
func (t triangle) trust(radius, root float64) move {
	least := t.leastRoot()
	damped := t.damp(least)
	m := move{z: damped.minimum(), root: least, full: true}
	m.potential, _ = t.reduction(m.z)
	excess := norm(m.z) - radius
	if excess <= slack*radius {
		return m
	}
	m.full = false
	lower := least*least + damped.newton(m.z, excess, radius)
	upper := norm(t.gradient()) / radius
	mu := math.Max(lower, math.Min(root*root, upper))
	for range 10 {
		m.root = math.Sqrt(mu)
		damped = t.damp(m.root)
		m.z = damped.minimum()
		excess = norm(m.z) - radius
		if math.Abs(excess) <= slack*radius {
			break
		}
		if excess > 0 {
			lower = mu
		}
		mu = math.Max(lower, mu+damped.newton(m.z, excess, radius))
	}
	return m
}

// slack is how far, relatively, a step may be from the trust radius: finding µ
// more closely buys nothing (Moré 1977).
const slack = 0.1

// newton returns the correction of µ that would bring ‖z(µ)‖ to the radius if
// 1/‖z(µ)‖ were linear in µ; t is the damped triangle that gave z.
func (t triangle) newton(z []float64, excess, radius float64) float64 {
	v := slices.Clone(z)
	floats.Scale(1/norm(z), v)
	t.solve(blas.Trans, v)
	return excess / (radius * floats.Dot(v, v))
}

// held returns the problem that is left for the columns in rest once the
// others of z are fixed at their values.
func (t triangle) held(z []float64, rest []int) triangle {
	isFree := make([]bool, len(z))
	for _, k := range rest {
		isFree[k] = true
	}
	c := slices.Clone(t.c)
	for k := range z {
		if !isFree[k] {
			addColumn(c, z[k], t.r, k)
		}
	}
	a := mat.NewDense(len(z), len(rest), nil)
	for i, k := range rest {
		a.SetCol(i, mat.Col(nil, k, t.r))
	}
	return reduce(a, c)
}

func addColumn(dst []float64, factor float64, r mat.Matrix, k int) {
	for i := range dst {
		dst[i] += factor * r.At(i, k)
	}
}

func norm(v []float64) float64 { return floats.Norm(v, 2) }
