package gisio

import "math"

// ellipsoid holds the two numbers that define an ellipsoid of revolution.
type ellipsoid struct {
	name              string
	semiMajor         float64 // a [m]
	inverseFlattening float64 // 1/f [-]
}

// EPSG registry, ellipsoids 7030 and 7019.
var (
	ellipsoidWGS84 = ellipsoid{"WGS 84", 6378137, 298.257223563}
	ellipsoidGRS80 = ellipsoid{"GRS 1980", 6378137, 298.257222101}
)

// krugerOrder is the highest power of the third flattening that the series carry. The terms left out are below
// 1e-8 m up to 30 degrees from the central meridian (Karney 2011, figure 3).
const krugerOrder = 6

// transverseMercator is the projection of one ellipsoid about a central meridian, before scale at the central
// meridian and false origin. Angles are in radians.
//
// Method: L. Krüger (1912), Konforme Abbildung des Erdellipsoids in der Ebene; series to order 6 in the third
// flattening as printed by C. F. F. Karney (2011), Transverse Mercator with an accuracy of a few nanometers,
// Journal of Geodesy 85, 475-485, equations 7-9, 11, 14, 19-21, 23-28, 35, 36.
//
//	φ, λ    latitude, longitude from the central meridian [rad]
//	τ, τ'   tangent of the latitude, of the conformal latitude [-]
//	ξ', η'  Gauss-Schreiber northing, easting of the conformal sphere [-]
//	ξ, η    Gauss-Krüger northing, easting [-], in units of the rectifying radius A
//	α, β    coefficients of the forward and the inverse series [-]
type transverseMercator struct {
	eccentricity     float64 // e [-]
	eccentricity2    float64 // e² [-]
	semiMajor        float64 // a [m]
	rectifyingRadius float64 // A: quarter meridian x 2/π [m]
	alpha, beta      [krugerOrder]float64
}

func newTransverseMercator(e ellipsoid) transverseMercator {
	f := 1 / e.inverseFlattening
	n := f / (2 - f)
	n2 := n * n
	t := transverseMercator{
		eccentricity2:    f * (2 - f),
		eccentricity:     math.Sqrt(f * (2 - f)),
		semiMajor:        e.semiMajor,
		rectifyingRadius: e.semiMajor / (1 + n) * (1 + n2*(1.0/4+n2*(1.0/64+n2/256))),
	}
	// Coefficients of n^j, n^(j+1), ... n^6 for j = 1 ... 6.
	alpha := [krugerOrder][]float64{
		{1.0 / 2, -2.0 / 3, 5.0 / 16, 41.0 / 180, -127.0 / 288, 7891.0 / 37800},
		{13.0 / 48, -3.0 / 5, 557.0 / 1440, 281.0 / 630, -1983433.0 / 1935360},
		{61.0 / 240, -103.0 / 140, 15061.0 / 26880, 167603.0 / 181440},
		{49561.0 / 161280, -179.0 / 168, 6601661.0 / 7257600},
		{34729.0 / 80640, -3418889.0 / 1995840},
		{212378941.0 / 319334400},
	}
	beta := [krugerOrder][]float64{
		{1.0 / 2, -2.0 / 3, 37.0 / 96, -1.0 / 360, -81.0 / 512, 96199.0 / 604800},
		{1.0 / 48, 1.0 / 15, -437.0 / 1440, 46.0 / 105, -1118711.0 / 3870720},
		{17.0 / 480, -37.0 / 840, -209.0 / 4480, 5569.0 / 90720},
		{4397.0 / 161280, -11.0 / 504, -830251.0 / 7257600},
		{4583.0 / 161280, -108847.0 / 3991680},
		{20648693.0 / 638668800},
	}
	power := 1.0
	for j := range krugerOrder {
		power *= n
		t.alpha[j] = power * polynomial(alpha[j], n)
		t.beta[j] = power * polynomial(beta[j], n)
	}
	return t
}

// polynomial gives c[0] + c[1] x + c[2] x² + ...
func polynomial(c []float64, x float64) float64 {
	sum := 0.0
	for i := len(c) - 1; i >= 0; i-- {
		sum = sum*x + c[i]
	}
	return sum
}

// conformal gives τ' of τ (Karney 2011, equations 7-9).
func (t *transverseMercator) conformal(tau float64) float64 {
	secant := math.Hypot(1, tau)
	sigma := math.Sinh(t.eccentricity * math.Atanh(t.eccentricity*tau/secant))
	return tau*math.Hypot(1, sigma) - sigma*secant
}

// newtonSteps bounds the iteration for τ. Three steps reach rounding for every ellipsoid of the Earth
// (Karney 2011, below equation 21); the rest is reserve.
const newtonSteps = 6

// geodetic gives τ of τ' by Newton's method (Karney 2011, equations 19-21).
func (t *transverseMercator) geodetic(conformal float64) float64 {
	const rounding = 0x1p-52
	oneLess := 1 - t.eccentricity2
	tau := conformal / oneLess
	if math.Abs(conformal) < 1 {
		tau = conformal
	}
	for range newtonSteps {
		current := t.conformal(tau)
		step := (conformal - current) / math.Hypot(1, current) *
			(1 + oneLess*tau*tau) / (oneLess * math.Hypot(1, tau))
		tau += step
		if math.Abs(step) <= rounding*math.Max(1, math.Abs(tau)) {
			break
		}
	}
	return tau
}

// forward gives x to the east of the central meridian and y from the equator [m] (Karney 2011, equations 10, 11).
func (t *transverseMercator) forward(phi, lambda float64) (x, y float64) {
	xi1, eta1 := t.schreiber(phi, lambda)
	xi, eta := xi1, eta1
	for j, a := range t.alpha {
		m := float64(2 * (j + 1))
		xi += a * math.Sin(m*xi1) * math.Cosh(m*eta1)
		eta += a * math.Cos(m*xi1) * math.Sinh(m*eta1)
	}
	return t.rectifyingRadius * eta, t.rectifyingRadius * xi
}

// schreiber gives ξ', η' (Karney 2011, equation 10).
func (t *transverseMercator) schreiber(phi, lambda float64) (xi, eta float64) {
	tau := t.conformal(math.Tan(phi))
	sin, cos := math.Sincos(lambda)
	return math.Atan2(tau, cos), math.Asinh(sin / math.Hypot(tau, cos))
}

// inverse gives latitude and longitude from the central meridian [rad] (Karney 2011, equations 14, 18-21).
func (t *transverseMercator) inverse(x, y float64) (phi, lambda float64) {
	xi, eta := y/t.rectifyingRadius, x/t.rectifyingRadius
	xi1, eta1 := xi, eta
	for j, b := range t.beta {
		m := float64(2 * (j + 1))
		xi1 -= b * math.Sin(m*xi) * math.Cosh(m*eta)
		eta1 -= b * math.Cos(m*xi) * math.Sinh(m*eta)
	}
	sin, cos := math.Sincos(xi1)
	sinh := math.Sinh(eta1)
	return math.Atan(t.geodetic(sin / math.Hypot(sinh, cos))), math.Atan2(sinh, cos)
}

// distortion gives the point scale without the scale at the central meridian [-], and the convergence: the
// bearing of grid north, clockwise from true north [rad] (Karney 2011, equations 23-28).
func (t *transverseMercator) distortion(phi, lambda float64) (scale, convergence float64) {
	tau := math.Tan(phi)
	tau1 := t.conformal(tau)
	sinLambda, cosLambda := math.Sincos(lambda)
	xi1, eta1 := t.schreiber(phi, lambda)
	p, q := 1.0, 0.0
	for j, a := range t.alpha {
		m := float64(2 * (j + 1))
		p += m * a * math.Cos(m*xi1) * math.Cosh(m*eta1)
		q += m * a * math.Sin(m*xi1) * math.Sinh(m*eta1)
	}
	sinPhi := math.Sin(phi)
	convergence = math.Atan2(tau1*sinLambda, cosLambda*math.Hypot(1, tau1)) + math.Atan2(q, p)
	scale = math.Sqrt(1-t.eccentricity2*sinPhi*sinPhi) * math.Hypot(1, tau) / math.Hypot(tau1, cosLambda) *
		t.rectifyingRadius / t.semiMajor * math.Hypot(p, q)
	return scale, convergence
}
