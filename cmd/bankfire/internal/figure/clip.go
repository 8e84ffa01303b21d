package figure

import "math"

// clip returns the pieces of a polyline that lie within a box (Liang and Barsky 1984,
// ACM Trans. Graphics 3, 1-22). Places that are not finite break the line.
func clip(at []point, in box) [][]point {
	var pieces [][]point
	var piece []point
	cut := func() {
		if len(piece) > 1 {
			pieces = append(pieces, piece)
		}
		piece = nil
	}
	for i := 1; i < len(at); i++ {
		t0, t1, ok := within(at[i-1], at[i], in)
		if !ok {
			cut()
			continue
		}
		if t0 > 0 || len(piece) == 0 {
			cut()
			piece = append(piece, nearest(in, between(at[i-1], at[i], t0)))
		}
		piece = append(piece, nearest(in, between(at[i-1], at[i], t1)))
		if t1 < 1 {
			cut()
		}
	}
	cut()
	return pieces
}

// within returns the stretch of the segment a-b, as shares of its length, that lies in a box.
func within(a, b point, in box) (t0, t1 float64, ok bool) {
	dx, dy := b.x-a.x, b.y-a.y
	if !finite(dx) || !finite(dy) {
		return 0, 0, false
	}
	t1 = 1
	edges := [4][2]float64{{-dx, a.x - in.x0}, {dx, in.x1 - a.x}, {-dy, a.y - in.y0}, {dy, in.y1 - a.y}}
	for _, e := range edges {
		p, q := e[0], e[1]
		switch {
		case p == 0 && q < 0:
			return 0, 0, false
		case p < 0:
			t0 = max(t0, q/p)
		case p > 0:
			t1 = min(t1, q/p)
		}
	}
	return t0, t1, t0 <= t1
}

func between(a, b point, t float64) point {
	switch t {
	case 0:
		return a
	case 1:
		return b
	}
	return point{a.x + float64(t*(b.x-a.x)), a.y + float64(t*(b.y-a.y))}
}

func finite(x float64) bool { return !math.IsNaN(x) && !math.IsInf(x, 0) }
