package report

import "standoff/report/figure"

// Style is how the pages look.
type Style struct {
	Paper  Paper
	Figure figure.Style
}

// Paper is the size of a sheet in points, portrait.
type Paper struct{ Width, Height float64 }

// The sheets of ISO 216 and of ANSI/ASME Y14.1.
var (
	A4     = Paper{595.28, 841.89}
	Letter = Paper{612, 792}
)

// DefaultStyle is A4 in the house's look.
func DefaultStyle() Style { return Style{Paper: A4, Figure: figure.Default()} }
