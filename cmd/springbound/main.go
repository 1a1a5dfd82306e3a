// Command springbound plans how much each well of a wellfield may pump, so that springs, wetlands, rivers and neighbours' wells stay
// inside their limits. It is the only place that prints, exits or reads flags; it strings the stages together.
package main

import (
	"context"
	"os"
	"os/signal"
	"syscall"
)

func main() {
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt, syscall.SIGTERM)
	code := run(ctx, os.Args[1:], streams{out: os.Stdout, err: os.Stderr, terminal: isTerminal(os.Stderr)})
	stop()
	os.Exit(code)
}
