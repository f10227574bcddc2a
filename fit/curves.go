package fit

// Curves are the drawn side of a result: what was measured and what the model
// says, ready for figures. Levels are in dB; ± are expanded, k = 2.
type Curves struct {
	Rise   []RiseCurve
	Levels []LevelCurve
}

// RiseCurve is the level at one distance relative to the far-field response of
// the same microphone, against frequency. Measured points and the fitted line
// have their own frequency grids.
type RiseCurve struct {
	Label    string
	Distance float64 // fitted, source to capsule centre, m
	Used     bool
	Corner   float64 // Hz, where the fitted rise is 3 dB; 0 when it lies outside the line

	LineHz, LineDB []float64 // fitted, fine grid
	LineExpanded   []float64 // ± of LineDB
	Hz             []float64 // third-octave or finer points inside the fit band
	DB, Expanded   []float64 // measured rise and its ±
	Residual       []float64 // measured − fitted, dB
}

// LevelCurve is the level at one frequency against distance, relative to what
// a far source of the same strength would give at 1 m by the 1/r law.
type LevelCurve struct {
	Hz            float64
	LineM, LineDB []float64 // fitted
	M, MExpanded  []float64 // fitted distance of the points and its ±
	DB, Expanded  []float64 // measured
	FreeFieldDB   []float64 // on LineM: the 1/r law alone, for comparison
}
