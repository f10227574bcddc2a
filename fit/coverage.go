package fit

import (
	"math"

	"gonum.org/v1/gonum/stat/distuv"
)

func coverageFactor(dof float64) float64 {
	if math.IsInf(dof, 1) || dof > 1e6 {
		return Coverage
	}
	return math.Max(Coverage, distuv.StudentsT{Mu: 0, Sigma: 1, Nu: dof}.Quantile(0.975))
}

func effectiveFreedom(parts, dof []float64) float64 {
	var total, sum float64
	for i, u := range parts {
		total += u * u
		sum += u * u * u * u / dof[i]
	}
	if sum == 0 {
		return math.Inf(1)
	}
	return total * total / sum
}
