package measure

// Warning is something that a reader of the result has to know, with a stable
// code for programs, a sentence for people and, where one is known, the cure.
type Warning struct {
	Code string `json:"code"`           // lower case with dashes, e.g. "spacing-not-resolved"
	Text string `json:"text"`           // one sentence, lower case, no full stop
	Hint string `json:"hint,omitempty"` // what to do about it
}
