// Tailrace plans, simulates and interprets sonic horizons in elongated
// condensates.
package main

import (
	"context"
	"errors"
	"fmt"
	"os"
	"os/signal"
	"syscall"

	"github.com/spf13/cobra"

	"tailrace/analysis/band"
	"tailrace/analysis/folder"
	"tailrace/analysis/shots"
	"tailrace/configs"
	"tailrace/gpe/lanes"
)

// version is the program's, and stands in every result.
const version = "0.1.0"

// Exit statuses.
const (
	done       = 0
	failed     = 1 // the work failed
	inputFault = 2 // the input is at fault
)

func main() { os.Exit(run()) }

func run() int {
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt, syscall.SIGTERM)
	defer stop()
	root := &cobra.Command{
		Use:           "tailrace",
		Short:         "sonic horizons in elongated condensates: from dial settings to a temperature with an error bar",
		Version:       version,
		SilenceErrors: true,
		SilenceUsage:  true,
		Args: func(_ *cobra.Command, args []string) error {
			if len(args) == 0 {
				return nil
			}
			return &usageError{fmt.Errorf("there is no command %q; tailrace --help lists what there is", args[0])}
		},
		RunE: func(c *cobra.Command, _ []string) error { return c.Help() },
	}
	root.CompletionOptions.DisableDefaultCmd = true
	root.SetFlagErrorFunc(func(c *cobra.Command, err error) error {
		return &usageError{fmt.Errorf("%w; %s --help lists what there is", err, c.CommandPath())}
	})
	root.AddCommand(runCommand(), planCommand(), spectrumCommand(), interpretCommand(), rehearseCommand(), cavityCommand(), checkCommand(), examplesCommand())
	root.PersistentPreRunE = func(*cobra.Command, []string) error {
		if err := lanes.CheckKernel(); err != nil {
			return &usageError{fmt.Errorf("%s = %q: %w", lanes.Variable, os.Getenv(lanes.Variable), err)}
		}
		return nil
	}
	err := root.ExecuteContext(ctx)
	if err == nil {
		return done
	}
	fmt.Fprintf(os.Stderr, "tailrace: %v\n", err)
	return status(err)
}

// usageError is a fault of the command line.
type usageError struct{ error }

func (e *usageError) Unwrap() error { return e.error }

// status tells faults of the input from failures of the work.
func status(err error) int {
	var config *configs.Error
	var use *folder.UseError
	var usage *usageError
	var measured *shots.Error
	var window *band.ErrWindow
	if errors.As(err, &config) || errors.As(err, &use) || errors.As(err, &usage) || errors.As(err, &measured) || errors.As(err, &window) {
		return inputFault
	}
	return failed
}

// oneConfig demands exactly one argument.
func oneConfig(_ *cobra.Command, args []string) error {
	if len(args) != 1 {
		return &usageError{fmt.Errorf("one config is expected, %d were given: the name of an example or the path of a file", len(args))}
	}
	return nil
}
