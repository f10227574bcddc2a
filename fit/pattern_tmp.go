package fit

// NearestPattern placeholder until pattern.go is there.
func NearestPattern(beta float64) string { return "" }
