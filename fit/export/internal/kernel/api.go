package kernel

// LimitTemperature is limitTemperature, for tests of the computation before it is
// translated.
func LimitTemperature(c []float64, p float64) (t, u float64, status int) {
	return limitTemperature(c, p)
}

// SpinodalTemperature is spinodalTemperature.
func SpinodalTemperature(c []float64, p float64) (t float64, status int) {
	return spinodalTemperature(c, p)
}

// SaturationTemperature is saturationTemperature.
func SaturationTemperature(c []float64, p float64) (t float64, status int) {
	return saturationTemperature(c, p)
}

// SaturationPressure is saturationPressure.
func SaturationPressure(c []float64, t float64) (p float64, status int) {
	return saturationPressure(c, t)
}

// Log10Flux is log10Flux.
func Log10Flux(c []float64, t, p float64) (lg float64, status int) { return log10Flux(c, t, p) }

// SurfaceTension is surfaceTension.
func SurfaceTension(c []float64, t float64) (sigma float64, status int) { return surfaceTension(c, t) }

// PressureAt is pressureAt.
func PressureAt(c []float64, t, v float64) (p float64, status int) { return pressureAt(c, t, v) }
