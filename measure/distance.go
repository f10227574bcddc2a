package measure

// Distance is one place on the list at which the microphone is measured.
type Distance struct {
	Label  string  // as the rig writes it, e.g. "30mm" or "2.5in"; safe as part of a file name
	Metres float64 // nominal, grille to the source's reference plane
}
