package measure

// Flag is what is wrong with a take or a distance, in one word that the
// manifest, the result and the pages share.
type Flag string

// The flags. A take with any of the rejecting ones is kept on disk and left
// out of the analysis.
const (
	Clipped          Flag = "clipped"           // samples at full scale
	LowSNR           Flag = "low-snr"           // the sweep does not stand clear of the noise
	Dropout          Flag = "dropout"           // samples lost, repeated or zeroed in the middle
	Incomplete       Flag = "incomplete"        // begins after the sweep has, or ends before it
	Xrun             Flag = "xrun"              // the audio system reported lost data
	Silent           Flag = "silent"            // nothing arrived
	Hum              Flag = "hum"               // mains hum dominates the noise
	Distorted        Flag = "distorted"         // harmonics above what a driver should make
	LevelJump        Flag = "level-jump"        // level does not fit the other distances
	DistanceMismatch Flag = "distance-mismatch" // arrival or level speaks for another distance
	ClockDrift       Flag = "clock-drift"       // play and record clocks differ
	Unsynchronised   Flag = "unsynchronised"    // play and record share no start
)

// Rejects reports whether a take with this flag is unfit for the analysis.
func (f Flag) Rejects() bool {
	switch f {
	case Clipped, LowSNR, Dropout, Incomplete, Xrun, Silent:
		return true
	}
	return false
}
