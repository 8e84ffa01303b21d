package numeric

// Node is a point of a quadrature rule and its weight.
type Node struct{ X, W float64 }

// Gauss5 is the Gauss-Legendre rule of five points on [0, 1], exact for polynomials of degree 9:
//
//	x = (1 -+ sqrt(5 -+ 2 sqrt(10/7))/3)/2,  w = (322 -+ 13 sqrt 70)/1800, and 1/2, 64/225.
//
// Source: Abramowitz and Stegun (1964), Table 25.4, there on [-1, 1].
func Gauss5() [5]Node {
	return [...]Node{
		{0.0469100770306680036, 0.1184634425280945438},
		{0.2307653449471584545, 0.239314335249683234},
		{0.5, 0.2844444444444444444},
		{0.7692346550528415455, 0.239314335249683234},
		{0.9530899229693319964, 0.1184634425280945438},
	}
}
