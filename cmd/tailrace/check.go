package main

import (
	"encoding/json"
	"errors"
	"fmt"
	"os"

	"github.com/spf13/cobra"

	"tailrace/configs"
	"tailrace/gpe/lab"
)

func checkCommand() *cobra.Command {
	asJSON := false
	c := &cobra.Command{
		Use:   "check CONFIG",
		Short: "is this config sound? says why not",
		Args:  oneConfig,
		RunE: func(_ *cobra.Command, args []string) error {
			config, err := configs.Load(args[0])
			if err != nil {
				return err
			}
			var checks []lab.Check
			if config.Given("cavity") {
				if _, err := config.TwoHorizons(); err != nil {
					return err
				}
			} else if config.Sweep() || config.Flow.Kind == configs.FlowUniform {
				s, err := config.Scenario()
				if err != nil {
					return err
				}
				if _, err := s.Predicted(); err != nil && !errors.Is(err, configs.ErrNoPrediction) {
					return err
				}
				checks = s.Checks
			}
			if asJSON {
				if checks == nil {
					checks = []lab.Check{}
				}
				return json.NewEncoder(os.Stdout).Encode(map[string]any{"config": config.Source, "sound": true, "checks": checks})
			}
			fmt.Printf("%s is sound\n", config.Source)
			for _, c := range checks {
				mark := "ok"
				if !c.OK {
					mark = "beyond its limit"
				}
				fmt.Printf("  %-20s %.3g, at most %.3g: %s\n", c.Name, c.Value, c.Limit, mark)
			}
			return nil
		},
	}
	c.Flags().BoolVar(&asJSON, "json", false, "print one JSON object")
	return c
}
