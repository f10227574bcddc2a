// Package session keeps a measurement on disk: the rig as it was, every take
// that was recorded, and the manifest that says what they are. It owns every
// path inside a session folder:
//
//	DIR/
//	  rig.yaml            the rig, byte for byte
//	  session.json        the manifest (schema standoff/session/1)
//	  excitation.wav      only where the sweep is not the rig's own
//	  takes/LABEL-N.wav   what was recorded, never rewritten
//	  anything else       derived, and replaced as a whole by WriteFile
//
// Every file is written to a temporary name in the directory where it belongs,
// synced, renamed, and the directory is synced. A take comes first and its entry
// in the manifest after it, so that whatever moment the power fails at, the
// folder holds the manifest of before or of after, and a take that the manifest
// does not know yet is found and taken up when the folder is opened again.
//
// One program at a time may add to a folder (OpenOrCreate takes a lock); any
// number may read it and write derived files (Open). All access goes through an
// os.Root, so a link or a name in a manifest cannot lead out of the folder.
package session
