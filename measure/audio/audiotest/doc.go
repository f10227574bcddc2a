// Package audiotest is the test suite of the contract in measure/audio: every
// recorder passes it.
//
//	func TestContract(t *testing.T) {
//		audiotest.Run(t, func(t *testing.T) audio.Recorder { return openMine(t) })
//	}
//
// Each line of the contract is one check with a name of its own. A recorder
// that cannot do what a check needs says so by an option; the check is then left
// out in the open, with the reason in the log:
//
//	Instant      there is nothing to interrupt and no meter to watch (WAV files)
//	RealTime     a take lasts as long as its excitation: deadlines are tried too
//	FreeClock    takes do not share a start: their delays are not compared
//	WithRequest  the only request that the recorder can answer
//	Within       how long a recorder may take to return
package audiotest
