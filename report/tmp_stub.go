package report

import "io"

// Temporary: replaced when the pages are there.
type Style struct{}

func DefaultStyle() Style { return Style{} }

func Write(io.Writer, *Data, Style) error { return nil }

type Plot struct{ Name string }

func (Plot) WritePNG(io.Writer) error { return nil }
func (Plot) WriteSVG(io.Writer) error { return nil }

func Plots(*Data, Style) ([]Plot, error) { return nil, nil }
