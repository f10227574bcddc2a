package main

import "fmt"

// summary prints what was found, for a person.
func (e *env) summary(a *analysed) {
	c := a.result.Capsule
	show := func(v *float64, s float64) string {
		if v == nil {
			return "-"
		}
		return fmt.Sprintf("%.4f", *v*s)
	}
	e.print("%s %s %s pattern %s", a.rig.Unit.Tag, c.Model, c.Body, c.Pattern)
	e.print("  mix %s ± %s", show(c.GradientFraction.Value, 1), show(c.GradientFraction.Expanded, 1))
	e.print("  spacing %s ± %s mm", show(c.PortSpacing.Value, 1e3), show(c.PortSpacing.Expanded, 1e3))
	e.print("  chi2 %.3f gate %.1f ms (%s) clock %s points %d band %.0f-%.0f", a.result.Fit.ReducedChiSquare, 1e3*a.result.Fit.Gate, a.result.Fit.GateReason, a.result.Fit.Clock, a.result.Fit.Points, a.result.Fit.From, a.result.Fit.To)
	for _, m := range a.result.Models {
		e.print("    %s/%s β %.4f d %.2f mm χ² %.1f Δ %.2f %s", m.Model, m.Body, m.GradientFraction, 1e3*m.PortSpacing, m.ChiSquare, m.Delta, m.Why)
	}
	for _, d := range a.result.Distances {
		e.print("    %s fitted %.2f ± %.2f mm misfit %.2f alone β %s d %s %v", d.Label, 1e3*d.Fitted, 1e3*d.FittedExpanded, d.Misfit, show(d.Alone.GradientFraction.Value, 1), show(d.Alone.PortSpacing.Value, 1e3), d.Flags)
	}
	for _, w := range a.result.Warnings {
		e.print("  ! %s (%s)", w.Text, w.Hint)
	}
}
