package main

import (
	"fmt"
	"os"

	"github.com/spf13/cobra"

	"tailrace/configs"
)

func examplesCommand() *cobra.Command {
	return &cobra.Command{
		Use:   "examples [NAME]",
		Short: "list the scenarios that come with the program, or print one to start from",
		Args: func(_ *cobra.Command, args []string) error {
			if len(args) > 1 {
				return &usageError{fmt.Errorf("at most one example is expected, %d were given", len(args))}
			}
			return nil
		},
		RunE: func(_ *cobra.Command, args []string) error {
			if len(args) == 1 {
				c, err := configs.Load(args[0])
				if err != nil {
					return err
				}
				_, err = os.Stdout.Write(c.Text)
				return err
			}
			for _, name := range configs.Examples() {
				c, err := configs.Load(name)
				if err != nil {
					return err
				}
				fmt.Printf("%-10s %s\n", name, c.Title)
			}
			return nil
		},
	}
}
