package steam

// Reducing values of region 1, IAPWS R7-97(2012) section 5.1.
const (
	region1Pressure    = 16.53e6 // Pa
	region1Temperature = 1386.0  // K
)

// region1 is Eq. 7: the dimensionless Gibbs energy of liquid water and its
// derivatives, at p in Pa and t in K.
func region1(p, t float64) gibbs {
	pi, tau := p/region1Pressure, region1Temperature/t
	x, y := 7.1-pi, tau-1.222
	g := gibbs{pi: pi, tau: tau}
	for _, c := range region1Terms {
		i, j := float64(c.i), float64(c.j)
		xi, yj := power(x, c.i), power(y, c.j)
		g.value += c.n * xi * yj
		g.byPi -= c.n * i * power(x, c.i-1) * yj
		g.byPiPi += c.n * i * (i - 1) * power(x, c.i-2) * yj
		g.byTau += c.n * xi * j * power(y, c.j-1)
		g.byTauTau += c.n * xi * j * (j - 1) * power(y, c.j-2)
		g.byPiTau -= c.n * i * power(x, c.i-1) * j * power(y, c.j-1)
	}
	return g
}

// region1Terms is Table 2 of IAPWS R7-97(2012).
var region1Terms = [...]term{
	{0, -2, 1.4632971213167e-1},
	{0, -1, -8.4548187169114e-1},
	{0, 0, -3.756360367204},
	{0, 1, 3.3855169168385},
	{0, 2, -9.5791963387872e-1},
	{0, 3, 1.5772038513228e-1},
	{0, 4, -1.6616417199501e-2},
	{0, 5, 8.1214629983568e-4},
	{1, -9, 2.8319080123804e-4},
	{1, -7, -6.0706301565874e-4},
	{1, -1, -1.8990068218419e-2},
	{1, 0, -3.2529748770505e-2},
	{1, 1, -2.1841717175414e-2},
	{1, 3, -5.283835796993e-5},
	{2, -3, -4.7184321073267e-4},
	{2, 0, -3.0001780793026e-4},
	{2, 1, 4.7661393906987e-5},
	{2, 3, -4.4141845330846e-6},
	{2, 17, -7.2694996297594e-16},
	{3, -4, -3.1679644845054e-5},
	{3, 0, -2.8270797985312e-6},
	{3, 6, -8.5205128120103e-10},
	{4, -5, -2.2425281908e-6},
	{4, -2, -6.5171222895601e-7},
	{4, 10, -1.4341729937924e-13},
	{5, -8, -4.0516996860117e-7},
	{8, -11, -1.2734301741641e-9},
	{8, -6, -1.7424871230634e-10},
	{21, -29, -6.8762131295531e-19},
	{23, -31, 1.4478307828521e-20},
	{29, -38, 2.6335781662795e-23},
	{30, -39, -1.1947622640071e-23},
	{31, -40, 1.8228094581404e-24},
	{32, -41, -9.3537087292458e-26},
}
