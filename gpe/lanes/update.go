package lanes

import "fmt"

// Updater adds sums of products of the rows of a matrix with themselves to a
// symmetric matrix: moments of densities. It keeps a workspace and serves one
// goroutine.
type Updater struct {
	n      int
	panels []float64 // [panel][row][8]
	tiles  []float64 // two of 8×8
}

// NewUpdater returns an updater for matrices of n columns. It panics when n is
// not positive.
func NewUpdater(n int) *Updater {
	if n <= 0 {
		panic(fmt.Sprintf("lanes: an updater of %d columns", n))
	}
	return &Updater{n: n, tiles: aligned[float64](2 * side * side)}
}

// side is the side of a tile of the product.
const side = 8

// Add adds Σ_r a[r·n+i] a[r·n+j] to c[i·stride+j] for j ≥ i; what lies below
// the diagonal of c is left as it is. The length of a is rows·n. The sum over
// rows is formed first and then added: where all products and sums are exact,
// as with multiples of a common quantum, so is the result, in any order.
func (u *Updater) Add(c []float64, stride int, a []float64) {
	rows := len(a) / u.n
	if rows*u.n != len(a) || stride < u.n || len(c) < (u.n-1)*stride+u.n {
		panic(fmt.Sprintf("lanes: %d values are not rows of %d, or the sums have no room for them", len(a), u.n))
	}
	if rows == 0 {
		return
	}
	count := (u.n + side - 1) / side
	if need := (count + 1) * rows * side; len(u.panels) < need {
		u.panels = aligned[float64](need)
	}
	u.pack(a, rows, count)
	size := rows * side
	for i := range count {
		for j := i; j < count; j += active.tilesAtOnce {
			active.tiles(u.tiles, u.panels[i*size:][:size], u.panels[j*size:], rows)
			for k := range min(active.tilesAtOnce, count-j) {
				u.put(c, stride, i, j+k, u.tiles[k*side*side:])
			}
		}
	}
}

// pack lays columns side by side in panels, so that a tile's work runs through
// memory in order; the last panel is filled up with zeros.
func (u *Updater) pack(a []float64, rows, count int) {
	for p := range count {
		panel := u.panels[p*rows*side:]
		width := min(side, u.n-p*side)
		for r := range rows {
			to := panel[r*side : r*side+side]
			copied := copy(to[:width], a[r*u.n+p*side:])
			clear(to[copied:])
		}
	}
}

// put adds a tile to c, on the diagonal its upper half.
func (u *Updater) put(c []float64, stride, i, j int, tile []float64) {
	for row := range min(side, u.n-i*side) {
		at := c[(i*side+row)*stride:]
		first := 0
		if i == j {
			first = row
		}
		for col := first; col < min(side, u.n-j*side); col++ {
			at[j*side+col] += tile[row*side+col]
		}
	}
}

// tile is one tile in plain Go, in parts of 2×4 whose sums fit the registers.
func tile(dst, a, b []float64, rows int) {
	for i := 0; i < side; i += 2 {
		for j := 0; j < side; j += 4 {
			var p0, p1, p2, p3, q0, q1, q2, q3 float64
			x, y := a[i:], b[j:]
			for r := 0; r < rows*side; r += side {
				u, v := (*[2]float64)(x[r:]), (*[4]float64)(y[r:])
				p0 += u[0] * v[0]
				p1 += u[0] * v[1]
				p2 += u[0] * v[2]
				p3 += u[0] * v[3]
				q0 += u[1] * v[0]
				q1 += u[1] * v[1]
				q2 += u[1] * v[2]
				q3 += u[1] * v[3]
			}
			*(*[4]float64)(dst[i*side+j:]) = [4]float64{p0, p1, p2, p3}
			*(*[4]float64)(dst[(i+1)*side+j:]) = [4]float64{q0, q1, q2, q3}
		}
	}
}
