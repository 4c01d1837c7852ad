package steam

import "math"

// Reducing values of region 2, IAPWS R7-97(2012) section 6.1.
const (
	region2Pressure    = 1e6   // Pa
	region2Temperature = 540.0 // K
)

// region2 is Eqs. 15 to 17: the dimensionless Gibbs energy of vapour, ideal
// part and residual part, and its derivatives, at p in Pa and t in K.
func region2(p, t float64) gibbs {
	pi, tau := p/region2Pressure, region2Temperature/t
	g := gibbs{pi: pi, tau: tau, value: math.Log(pi), byPi: 1 / pi, byPiPi: -1 / (pi * pi)}
	for _, c := range region2Ideal {
		j := float64(c.j)
		g.value += c.n * power(tau, c.j)
		g.byTau += c.n * j * power(tau, c.j-1)
		g.byTauTau += c.n * j * (j - 1) * power(tau, c.j-2)
	}
	y := tau - 0.5
	for _, c := range region2Residual {
		i, j := float64(c.i), float64(c.j)
		xi, yj := power(pi, c.i), power(y, c.j)
		g.value += c.n * xi * yj
		g.byPi += c.n * i * power(pi, c.i-1) * yj
		g.byPiPi += c.n * i * (i - 1) * power(pi, c.i-2) * yj
		g.byTau += c.n * xi * j * power(y, c.j-1)
		g.byTauTau += c.n * xi * j * (j - 1) * power(y, c.j-2)
		g.byPiTau += c.n * i * power(pi, c.i-1) * j * power(y, c.j-1)
	}
	return g
}

// region2Ideal is Table 10 of IAPWS R7-97(2012); the powers of pi are 0.
var region2Ideal = [...]term{
	{0, 0, -9.6927686500217},
	{0, 1, 1.0086655968018e1},
	{0, -5, -5.608791128302e-3},
	{0, -4, 7.1452738081455e-2},
	{0, -3, -4.0710498223928e-1},
	{0, -2, 1.4240819171444},
	{0, -1, -4.383951131945},
	{0, 2, -2.8408632460772e-1},
	{0, 3, 2.1268463753307e-2},
}

// region2Residual is Table 11 of IAPWS R7-97(2012).
var region2Residual = [...]term{
	{1, 0, -1.7731742473213e-3},
	{1, 1, -1.7834862292358e-2},
	{1, 2, -4.5996013696365e-2},
	{1, 3, -5.7581259083432e-2},
	{1, 6, -5.032527872793e-2},
	{2, 1, -3.3032641670203e-5},
	{2, 2, -1.8948987516315e-4},
	{2, 4, -3.9392777243355e-3},
	{2, 7, -4.3797295650573e-2},
	{2, 36, -2.6674547914087e-5},
	{3, 0, 2.0481737692309e-8},
	{3, 1, 4.3870667284435e-7},
	{3, 3, -3.227767723857e-5},
	{3, 6, -1.5033924542148e-3},
	{3, 35, -4.0668253562649e-2},
	{4, 1, -7.8847309559367e-10},
	{4, 2, 1.2790717852285e-8},
	{4, 3, 4.8225372718507e-7},
	{5, 7, 2.2922076337661e-6},
	{6, 3, -1.6714766451061e-11},
	{6, 16, -2.1171472321355e-3},
	{6, 35, -2.3895741934104e1},
	{7, 0, -5.905956432427e-18},
	{7, 11, -1.2621808899101e-6},
	{7, 25, -3.8946842435739e-2},
	{8, 8, 1.1256211360459e-11},
	{8, 36, -8.2311340897998},
	{9, 13, 1.9809712802088e-8},
	{10, 4, 1.0406965210174e-19},
	{10, 10, -1.0234747095929e-13},
	{10, 14, -1.0018179379511e-9},
	{16, 29, -8.0882908646985e-11},
	{16, 50, 1.0693031879409e-1},
	{18, 57, -3.3662250574171e-1},
	{20, 20, 8.9185845355421e-25},
	{20, 35, 3.0629316876232e-13},
	{20, 48, -4.2002467698208e-6},
	{21, 21, -5.9056029685639e-26},
	{22, 53, 3.7826947613457e-6},
	{23, 39, -1.2768608934681e-15},
	{24, 26, 7.3087610595061e-29},
	{24, 40, 5.5414715350778e-17},
	{24, 58, -9.436970724121e-7},
}
