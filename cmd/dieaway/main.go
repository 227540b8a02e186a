// Dieaway measures resonant circuits by the way their ringing dies away: it
// turns an oscilloscope's capture of a free decay into damped and natural
// frequency, time constant and Q with their uncertainty, says when to distrust
// them, and files the evidence as one page.
package main

import (
	"context"
	"os"
	"os/signal"
)

func main() {
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt)
	context.AfterFunc(ctx, stop) // a second interrupt ends the program at once
	os.Exit(run(ctx, os.Args, os.Stdin, os.Stdout, os.Stderr))
}
