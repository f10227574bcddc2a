// Package lsq solves small dense nonlinear least-squares problems,
//
//	min ½‖r(x)‖²   with   lower ≤ x ≤ upper,   r: ℝᴺ → ℝᴹ,
//
// and says how far the answer can be trusted. It knows nothing of what the
// residuals mean: divide each by its standard uncertainty before it arrives
// here and the covariance is that of the parameters.
//
// Method: Levenberg–Marquardt as a trust region in scaled parameters,
//
//	min ‖J p + r‖   subject to   ‖D p‖ ≤ Δ,
//
// whose solution is the least-squares solution of
//
//	[ J    ]       [ −r ]
//	[ √µ D ] p  ≈  [  0 ]
//
// for some µ ≥ 0. Each such system is solved by QR, so the condition of J is
// never squared. D holds the largest norm that each column of J has had, µ is
// found by Newton's iteration on the secular equation ‖D p(µ)‖ = Δ, and Δ
// follows the ratio of actual to predicted reduction (Moré, "The
// Levenberg–Marquardt algorithm: implementation and theory", 1977).
//
// Bounds are kept by an active set: a parameter at a bound that the gradient
// pushes outwards is frozen for the step; a step that would cross a bound
// stops that parameter there and is solved again for the others.
//
// The covariance is (JᵀJ)⁻¹, formed from the singular values of J with its
// columns scaled to unit norm. A status that is good says three things: the
// iteration converged, every residual is finite, and every parameter that was
// free to move has an effect on the residuals.
//
// Solve is deterministic and keeps no state between calls; calls may run at
// the same time when their callbacks may.
package lsq
