package fit

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/stat/distuv"
)

// NoiseKind names a distribution of measured minus predicted limits.
type NoiseKind string

// The distributions.
const (
	Gaussian NoiseKind = "gaussian"
	Student  NoiseKind = "student" // heavy tails: single rows far off pull little
	// Survival lets each sample boil at random with the flux it sees, see survival.go.
	// Rows without a volume and a heating rate, holding time or lifetime have no such
	// law; they stay Gaussian, and the calibration says so. A row with a lifetime counts
	// as one waiting time: for a mean of several that is less than it tells.
	Survival NoiseKind = "survival"
)

// Noise is the distribution of the readings about the predicted limits.
type Noise struct {
	Kind NoiseKind
	// Degrees are the degrees of freedom of Student noise; 0 means 4, the smallest
	// whole number with a finite fourth moment, common practice for robust regression.
	Degrees float64
	// Estimate frees the degrees of freedom, as the term "degrees" does; Degrees are
	// then their start.
	Estimate bool
}

// Bounds of the degrees of freedom. Below 1 there is no mean; above 100 no data set
// tells Student's distribution from the normal one.
const (
	fewestDegrees = 1
	mostDegrees   = 100
)

func (n Noise) complete() (Noise, error) {
	fill(&n.Kind, Gaussian)
	switch n.Kind {
	case Gaussian, Survival:
		if n.Estimate {
			return n, &OptionError{"noise", string(n.Kind), "student for degrees of freedom to be estimated"}
		}
	case Student:
		if n.Degrees == 0 {
			n.Degrees = 4
		}
		if !(n.Degrees >= 1 && n.Degrees <= 1000) {
			return n, &OptionError{"degrees of freedom", fmt.Sprintf("%.10g", n.Degrees), "1 to 1000"}
		}
	default:
		return n, &OptionError{"noise", string(n.Kind), "one of gaussian, student, survival"}
	}
	return n, nil
}

// Information is what one reading with variance v in K² tells about its own limit,
// in 1/K², and about v, in 1/K⁴: the expected curvature of −ln of its density. For
// survival noise it is that of a reading without the scatter of boiling.
func (n Noise) Information(v float64) (limit, variance float64) {
	l := n.law()
	d := l.of(0, v, false)
	return d.irr, d.ivv
}

// density is −ln of the density (or probability) of one row with its derivatives.
type density struct {
	nll    float64
	dr, dv float64 // ∂nll/∂r, ∂nll/∂v
	irr    float64 // information about r: ∂²nll/∂r² or its expectation, ≥ 0
	hrr    float64 // ∂²nll/∂r² itself, which is negative in the tails of Student's law
	ivv    float64 // information about v; not of survival rows
}

// curvature chooses the second derivatives of −ln L: the expected ones are what the
// data tell, and never negative; with the observed ones Newton's method converges
// quadratically.
type curvature int

const (
	expected curvature = iota
	observed
)

func (d *density) curvature(k curvature) float64 {
	if k == observed {
		return d.hrr
	}
	return d.irr
}

// law is a noise with all that its densities share.
type law struct {
	student bool
	ν       float64
	c       float64 // −ln of the normalisation of Student's density at unit scale
}

func (n Noise) law() law { return lawOf(n.Kind == Student, n.Degrees) }

func lawOf(student bool, ν float64) law {
	l := law{student: student, ν: ν}
	if student {
		a, _ := math.Lgamma((ν + 1) / 2)
		b, _ := math.Lgamma(ν / 2)
		l.c = 0.5*math.Log(ν*math.Pi) + b - a
	}
	return l
}

// of returns the density of the residual r with variance v. An intact row says
// only that the limit lies above the reading.
func (n *law) of(r, v float64, intact bool) density {
	switch {
	case n.student && intact:
		return n.studentIntact(r, v)
	case n.student:
		ν := n.ν
		w := (ν + 1) / (ν*v + r*r)
		return density{
			nll: 0.5*(ν+1)*math.Log1p(r*r/(ν*v)) + 0.5*math.Log(v) + n.c,
			dr:  w * r,
			dv:  0.5/v - 0.5*w*r*r/v,
			irr: (ν + 1) / ((ν + 3) * v),
			hrr: w - 2*w*r*r/(ν*v+r*r),
			ivv: 0.5 * ν / ((ν + 3) * v * v),
		}
	case intact:
		return normalIntact(r, v)
	default:
		return density{
			nll: 0.5*math.Log(2*math.Pi*v) + 0.5*r*r/v,
			dr:  r / v,
			dv:  0.5/v - 0.5*r*r/(v*v),
			irr: 1 / v,
			hrr: 1 / v,
			ivv: 0.5 / (v * v),
		}
	}
}

// normalIntact is −ln Φ(z) with z = −r/√v and the hazard h = φ(z)/Φ(z).
func normalIntact(r, v float64) density {
	s := math.Sqrt(v)
	z := -r / s
	lnΦ, h := lnNormal(z)
	c := h * (z + h) // −d²lnΦ/dz², between 0 and 1
	return density{nll: -lnΦ, dr: h / s, dv: 0.5 * h * z / v, irr: c / v, hrr: c / v, ivv: 0.25 * c * z * z / (v * v)}
}

// lnNormal returns ln Φ(z) and φ(z)/Φ(z) also far in the lower tail, where Φ
// underflows; there by the continued fraction of the Mills ratio (Abramowitz and
// Stegun 26.2.14).
func lnNormal(z float64) (lnΦ, hazard float64) {
	const lnSqrt2Pi = 0.91893853320467274178
	if z > -12 {
		Φ := 0.5 * math.Erfc(-z/math.Sqrt2)
		return math.Log(Φ), math.Exp(-0.5*z*z-lnSqrt2Pi) / Φ
	}
	x := -z
	f := x
	for k := 40; k >= 1; k-- {
		f = x + float64(k)/f
	}
	return -0.5*z*z - lnSqrt2Pi - math.Log(f), f
}

// studentIntact is −ln of the probability that a Student variable exceeds r/√v.
func (n *law) studentIntact(r, v float64) density {
	s := math.Sqrt(v)
	t := distuv.StudentsT{Mu: 0, Sigma: 1, Nu: n.ν}
	z := -r / s
	F := t.CDF(z)
	h := t.Prob(z) / F
	// dlnprob/dz = −(ν+1)z/(ν+z²)
	bend := h * ((n.ν+1)*z/(n.ν+z*z) + h)
	c := math.Max(0, bend)
	return density{nll: -math.Log(F), dr: h / s, dv: 0.5 * h * z / v, irr: c / v, hrr: bend / v, ivv: 0.25 * c * z * z / (v * v)}
}
