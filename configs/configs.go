// Package configs carries the runnable rigs of this folder inside the program,
// so that the demonstration needs no file beside it.
package configs

import _ "embed"

// VirtualCardioid is the rig of the demonstration.
//
//go:embed virtual-cardioid.yaml
var VirtualCardioid []byte
