package parts

import "math"

// Saturates reports whether the inductance depends on current.
func (l *Inductor) Saturates() bool { return !l.InductanceAtCurrent.Empty() }

// IncrementalAt returns the incremental inductance [H] at a direct current.
//
//	Linc(i) = L0 · m(|i|)
//
// m is InductanceAtCurrent: linear in between, constant below its first point,
// falling on with its last slope beyond the last, down to MultiplierFloor.
func (l *Inductor) IncrementalAt(i float64) float64 {
	return l.Inductance * overBias(&l.InductanceAtCurrent, math.Abs(i))
}

// FluxLinkage returns the flux linkage [Vs] at a current: λ(i) = ∫ Linc di from
// zero, odd in i.
func (l *Inductor) FluxLinkage(i float64) float64 {
	s, _ := biasMoments(&l.InductanceAtCurrent, 0, math.Abs(i))
	return math.Copysign(l.Inductance*s, i)
}

// StoredEnergy returns the energy [J] at a current: ∫ i Linc di from zero.
func (l *Inductor) StoredEnergy(i float64) float64 {
	_, s := biasMoments(&l.InductanceAtCurrent, 0, math.Abs(i))
	return l.Inductance * s
}

// moments returns ∫ Linc di and ∫ i Linc di over [valley, peak].
func (l *Inductor) moments(valley, peak float64) (zeroth, first float64) {
	t := &l.InductanceAtCurrent
	switch {
	case valley >= 0:
		zeroth, first = biasMoments(t, valley, peak)
	case peak <= 0:
		zeroth, first = biasMoments(t, -peak, -valley)
		first = -first
	default:
		z0, f0 := biasMoments(t, 0, -valley)
		z1, f1 := biasMoments(t, 0, peak)
		zeroth, first = z0+z1, f1-f0
	}
	return l.Inductance * zeroth, l.Inductance * first
}

// InductanceOver returns the inductance [H] that a swing between two currents
// sees: flux swing over current swing, the mean of the incremental inductance.
//
//	L = [λ(ipk) − λ(ivl)]/(ipk − ivl)
//
// For a vanishing swing it is the incremental inductance. Valid for any signs,
// valley <= peak.
func (l *Inductor) InductanceOver(valley, peak float64) float64 {
	if l.InductanceAtCurrent.Empty() {
		return l.Inductance
	}
	if !(peak-valley > 1e-9*(math.Abs(peak)+math.Abs(valley))) {
		return l.IncrementalAt((peak + valley) / 2)
	}
	flux, _ := l.moments(valley, peak)
	return flux / (peak - valley)
}

const (
	swingSteps     = 8     // [1] plain Newton takes 3 to 5 on a curve without sharp corners
	bracketSteps   = 80    // [1] bisection alone ends within 60
	swingTolerance = 1e-13 // [1] of the current swing, a few roundings
	swingLast      = 1e-7  // [1] of the current swing: a Newton step after which none is needed
)

// SwingAbout returns valley and peak [A] of the current that a triangular flux
// linkage of peak-to-peak swing flux [Vs] makes about a mean current.
//
//	λ(ipk) − λ(ivl) = Δλ,  ∫ i Linc di over [ivl, ipk] = I Δλ
//
// The flux of a step-down inductor is triangular, so every value between its
// extremes is equally long present and the mean current is the mean of i(λ) over
// the swing: peak and valley follow from the flux curve, not from a straight
// line. Valid for flux > 0; drops that bend the triangle are neglected.
//
// Derived; checked by sampling the waveform in TestSwingHoldsMeanAndFlux.
func (l *Inductor) SwingAbout(mean, flux float64) (valley, peak float64) {
	half := flux / (2 * l.IncrementalAt(mean))
	valley, peak = mean-half, mean+half
	if l.InductanceAtCurrent.Empty() {
		return valley, peak
	}
	if v, p, ok := l.swingInSegment(mean, flux); ok {
		return v, p
	}
	for range swingSteps {
		z, f := l.moments(valley, peak)
		r0, r1 := flux-z, mean*flux-f
		w := peak - valley
		dp := (r1 - valley*r0) / (l.IncrementalAt(peak) * w)
		dv := (r1 - peak*r0) / (l.IncrementalAt(valley) * w)
		if !(dp-dv > -0.9*w) {
			break
		}
		valley, peak = valley+dv, peak+dp
		if math.Abs(dp)+math.Abs(dv) <= swingTolerance*(peak-valley) {
			return valley, peak
		}
	}
	return l.swingBracketed(mean, flux)
}

// swingInSegment solves the same where the whole swing lies in one segment of the
// table: closed form but for one small correction.
//
//	Linc = a + b i:  w = Δλ/L(u),  u = I − b w²/(12 L(u))
//
// with u the middle and w the width of the swing. Newton on u; the slope of the
// right-hand side, (b w/2L)², is small, so the second step is the last as a rule.
func (l *Inductor) swingInSegment(mean, flux float64) (valley, peak float64, ok bool) {
	t := &l.InductanceAtCurrent
	i, n := 1, len(t.X)
	for i < n-1 && mean > t.X[i] {
		i++
	}
	if n < 2 {
		return 0, 0, false
	}
	b := l.Inductance * (t.Y[i] - t.Y[i-1]) / (t.X[i] - t.X[i-1])
	at := l.Inductance*t.Y[i-1] - b*t.X[i-1]
	u := mean
	for range swingSteps {
		inverse := 1 / (at + b*u)
		w, bend := flux*inverse, b*inverse
		slope := bend * bend * w * w / 4
		if !(w > 0 && slope < 0.25) {
			break
		}
		move := (mean - bend*w*w/12 - u) * (1 + slope)
		u += move
		if math.Abs(move) <= swingLast*w {
			w -= bend * w * move // at the moved middle; what is left is its square
			valley, peak = u-w/2, u+w/2
			return valley, peak, valley >= t.X[i-1] && peak <= t.X[i]
		}
	}
	return 0, 0, false
}

// swingBracketed solves the same for the flux linkage half-way between valley and
// peak, of which the mean current is a rising function. It serves curves so sharp
// that Newton cycles.
func (l *Inductor) swingBracketed(mean, flux float64) (valley, peak float64) {
	low := l.FluxLinkage(mean) - flux/2
	high := low + flux
	centre := (low + high) / 2
	for range bracketSteps {
		valley, peak = l.CurrentAtFlux(centre-flux/2), l.CurrentAtFlux(centre+flux/2)
		_, f := l.moments(valley, peak)
		excess := f/flux - mean
		if excess > 0 {
			high = centre
		} else {
			low = centre
		}
		next := centre - excess*flux/(peak-valley)
		if !(next > low && next < high) {
			next = (low + high) / 2
		}
		if math.Abs(next-centre) <= swingTolerance*flux {
			break
		}
		centre = next
	}
	return valley, peak
}

// CurrentAtFlux returns the current [A] at a flux linkage [Vs], the inverse of
// FluxLinkage. It gives the peak in discontinuous conduction, where the flux
// starts at zero.
func (l *Inductor) CurrentAtFlux(flux float64) float64 {
	target := math.Abs(flux)
	i := target / l.Inductance
	if l.InductanceAtCurrent.Empty() {
		return math.Copysign(i, flux)
	}
	low, high := 0.0, i/l.leastMultiplier()
	for range bracketSteps {
		s, _ := biasMoments(&l.InductanceAtCurrent, 0, i)
		lack := target - l.Inductance*s
		if lack > 0 {
			low = i
		} else {
			high = i
		}
		next := i + lack/l.IncrementalAt(i)
		if !(next >= low && next <= high) {
			next = (low + high) / 2
		}
		done := math.Abs(next-i) <= swingTolerance*next
		i = next
		if done {
			break
		}
	}
	return math.Copysign(i, flux)
}

// leastMultiplier bounds the multiplier at any current from below.
func (l *Inductor) leastMultiplier() float64 {
	least := MultiplierFloor
	for _, y := range l.InductanceAtCurrent.Y {
		least = min(least, y)
	}
	return least
}
