package main

import "math"

// This file fits how cost grows: y = c x^e, by least squares on the logarithms.

// exponent gives e; false where it cannot be fitted.
func exponent(x, y []float64) (e float64, ok bool) {
	var mx, my float64
	for i := range x {
		if x[i] <= 0 || y[i] <= 0 {
			return 0, false
		}
		mx += math.Log(x[i]) / float64(len(x))
		my += math.Log(y[i]) / float64(len(x))
	}
	var xy, xx float64
	for i := range x {
		dx := math.Log(x[i]) - mx
		xy += dx * (math.Log(y[i]) - my)
		xx += dx * dx
	}
	return xy / xx, xx > 0
}
