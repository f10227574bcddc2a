// Command standoff measures how a microphone behaves near a source: how much of
// its capsule is gradient and how much pressure, and how far apart its sound
// entries are.
package main

import (
	"context"
	"os"
)

func main() {
	os.Exit(run(context.Background(), os.Args[1:], os.Stdin, os.Stdout, os.Stderr))
}
