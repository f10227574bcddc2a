package lsq_test

import (
	"fmt"
	"log"

	"standoff/fit/lsq"
)

// A straight line through five points, each with standard uncertainty 0.1.
func ExampleSolve() {
	y := []float64{1.02, 1.48, 2.05, 2.47, 3.01}
	result, err := lsq.Solve(lsq.Problem{
		M: len(y),
		Residuals: func(dst, p []float64) {
			for i := range y {
				dst[i] = (p[0] + p[1]*float64(i) - y[i]) / 0.1
			}
		},
	}, []float64{0, 0}, lsq.Settings{})
	if err != nil {
		log.Fatal(err)
	}
	sd := result.StandardErrors(1)
	fmt.Println(result.Status)
	fmt.Printf("offset %.3f ± %.3f, slope %.3f ± %.3f (k = 1)\n", result.X[0], sd[0], result.X[1], sd[1])
	// Output:
	// converged: the misfit cannot be reduced further
	// offset 1.012 ± 0.077, slope 0.497 ± 0.032 (k = 1)
}
