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
	swingSteps     = 24    // [1] Newton takes 3 to 5; the bound ends a step into a kink
	swingTolerance = 1e-13 // [1] of the current swing, a few roundings
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
	for range swingSteps {
		z, f := l.moments(valley, peak)
		r0, r1 := flux-z, mean*flux-f
		w := peak - valley
		dp := (r1 - valley*r0) / (l.IncrementalAt(peak) * w)
		dv := (r1 - peak*r0) / (l.IncrementalAt(valley) * w)
		// A step that would cross valley and peak is halved until it does not.
		for dp-dv <= -0.9*w {
			dp, dv = dp/2, dv/2
		}
		valley, peak = valley+dv, peak+dp
		if math.Abs(dp)+math.Abs(dv) <= swingTolerance*w {
			break
		}
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
	for range swingSteps {
		s, _ := biasMoments(&l.InductanceAtCurrent, 0, i)
		d := (target - l.Inductance*s) / l.IncrementalAt(i)
		i = max(i+d, i/2)
		if math.Abs(d) <= swingTolerance*i {
			break
		}
	}
	return math.Copysign(i, flux)
}
