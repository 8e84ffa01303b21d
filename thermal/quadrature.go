package thermal

// pair is two points of a Gauss-Legendre rule on [0, 1], at x on both sides of the middle, and the weight of each.
type pair struct{ x, w float64 }

// Gauss-Legendre rules on [0, 1] with 4, 8, 12 and 16 points, exact for polynomials of degree 7, 15, 23 and 31. Computed
// to 40 digits as roots of the Legendre polynomials; Abramowitz and Stegun (1964), Table 25.4, has the same on [-1, 1].
// Points come in pairs so that exp(c + x) and exp(c - x) share an exponential.
var (
	gauss4 = [...]pair{
		{0.1699905217924281324, 0.3260725774312730713},
		{0.4305681557970262876, 0.1739274225687269287},
	}
	gauss8 = [...]pair{
		{0.09171732124782490247, 0.1813418916891809915},
		{0.2627662049581644929, 0.1568533229389436437},
		{0.3983332387068133698, 0.1111905172266872353},
		{0.4801449282487681158, 0.05061426814518812958},
	}
	gauss12 = [...]pair{
		{0.06261670425573445774, 0.1245735229067013925},
		{0.1839157494990900969, 0.1167462682691774044},
		{0.2936589771433087236, 0.1015837133615329609},
		{0.3849513370971523435, 0.08003916427167311317},
		{0.4520586281852374283, 0.05346966299765921548},
		{0.4907803171233596253, 0.0235876681932559136},
	}
	gauss16 = [...]pair{
		{0.04750625491881872009, 0.09472530522753424814},
		{0.1408017753896294566, 0.09130170752246179443},
		{0.2290083888286136932, 0.08457825969750126909},
		{0.3089381222013218742, 0.07479799440828836604},
		{0.3777022041775015169, 0.06231448562776693603},
		{0.4328156011939158719, 0.0475792558412463924},
		{0.472287511536616288, 0.03112676196932394643},
		{0.4947004674958249663, 0.01357622970587704743},
	}
)

// rules are the rules with where a panel of each ends: if an exponent changes by more than rise over it, or the nearest
// pole is less than room times its width away. The error of n points for exp(rise x) is rise^2n (n!)^4/((2n+1) (2n)!^3) of
// its largest value; for a pole it is rho^-2n, rho being the sum of the half axes of the ellipse with foci at both ends
// through the pole, in units of half the width. The limits keep both below about 2e-15.
var rules = [...]struct {
	rise, room float64
	pairs      []pair
}{
	{0.25, 20, gauss4[:]},
	{3, 2, gauss8[:]},
	{8.5, 0.8, gauss12[:]},
	{widest, 0.5, gauss16[:]},
}

// widest is the largest change of an exponent over one panel.
const widest = 16

// gauss is the shortest rule for a panel over which an exponent changes by rise and whose nearest pole is room times
// its width away.
func gauss(rise, room float64) []pair {
	for i := range rules {
		if r := &rules[i]; rise <= r.rise && room >= r.room {
			return r.pairs
		}
	}
	return gauss16[:]
}

// negligible is the fall of an exponent beyond which nothing is left of an integral: exp(-45) = 3e-20.
const negligible = 45

// nestedNode is a point with its weights in a Kronrod rule and in the Gauss rule inside it, 0 where it is not part of that.
type nestedNode struct{ x, w, gauss float64 }

// kronrod15 is the 15-point Kronrod rule, exact to degree 22, around the 7-point Gauss rule, on [0, 1]. Computed to 40
// digits from the Stieltjes polynomial; Kronrod (1965), Nodes and Weights of Quadrature Formulas.
var kronrod15 = [...]nestedNode{
	{0.004272314439593680397, 0.01146766100526461248, 0},
	{0.02544604382862073774, 0.03154604631498927665, 0.06474248308443484664},
	{0.06756778832011546361, 0.05239500516112509192, 0},
	{0.1292344072003027801, 0.07032662985776295937, 0.139852695744638334},
	{0.2069563822661544349, 0.08450236331963395141, 0},
	{0.2970774243113014165, 0.09517528903239270496, 0.1909150252525594725},
	{0.3961075224960507662, 0.1022164700376494462, 0},
	{0.5, 0.104741070542363914, 0.2089795918367346939},
	{0.6038924775039492338, 0.1022164700376494462, 0},
	{0.7029225756886985835, 0.09517528903239270496, 0.1909150252525594725},
	{0.7930436177338455651, 0.08450236331963395141, 0},
	{0.8707655927996972199, 0.07032662985776295937, 0.139852695744638334},
	{0.9324322116798845364, 0.05239500516112509192, 0},
	{0.9745539561713792623, 0.03154604631498927665, 0.06474248308443484664},
	{0.9957276855604063196, 0.01146766100526461248, 0},
}
