package main

import (
	"encoding/json"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"strings"

	"github.com/spf13/cobra"

	"tailrace/analysis/shots"
	"tailrace/configs"
	"tailrace/gpe/lab"
)

func checkCommand() *cobra.Command {
	asJSON, condensate := false, false
	c := &cobra.Command{
		Use:   "check FILE",
		Short: "is this config or shots file sound? says why not",
		Long: `check validates a scenario, or a file of shots (.npz, .csv) or the folder of a
run, without analysing it. Shots are taken to be in SI units unless --condensate
says otherwise.`,
		Args: oneConfig,
		RunE: func(_ *cobra.Command, args []string) error {
			if isShots(args[0]) {
				return checkShots(args[0], condensate, asJSON)
			}
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
	c.Flags().BoolVar(&condensate, "condensate", false, "shots are in healing lengths and atoms per healing length")
	return c
}

// isShots tells a file of shots, or a run's folder, from a scenario.
func isShots(path string) bool {
	switch strings.ToLower(filepath.Ext(path)) {
	case ".npz", ".npy", ".csv", ".txt":
		return true
	}
	info, err := os.Stat(path)
	return err == nil && info.IsDir()
}

func checkShots(path string, condensate, asJSON bool) error {
	units := shots.Lab
	if condensate {
		units = shots.Condensate
	}
	set, err := shots.Read(path, units)
	if err != nil {
		return err
	}
	odd := set.Odd()
	if asJSON {
		rejected := []map[string]any{}
		for _, r := range odd {
			rejected = append(rejected, map[string]any{"shot": r.Shot, "why": r.Why})
		}
		return json.NewEncoder(os.Stdout).Encode(map[string]any{"shots": set.Path, "sound": true, "count": set.Count, "pixels": set.Pixels, "pixel": set.Pixel, "missing_pixels": set.Missing, "odd": rejected})
	}
	fmt.Printf("%s is sound: %s\n", set.Path, set.Describe())
	for _, r := range odd {
		fmt.Printf("  shot %d would be left out: %s\n", r.Shot, r.Why)
	}
	return nil
}
