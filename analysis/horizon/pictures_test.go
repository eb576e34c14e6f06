package horizon

import (
	"os"
	"testing"

	"tailrace/analysis/band"
	"tailrace/analysis/figure"
)

// The picture of what each thermometer makes of exact maps, from sharp horizons
// to smooth ones: TAILRACE_PICTURES names the folder it goes to. It takes some
// minutes.
func TestPictureOfThermometers(t *testing.T) {
	folder := os.Getenv("TAILRACE_PICTURES")
	if folder == "" {
		t.Skip("TAILRACE_PICTURES names the folder for the picture")
	}
	var widths, scattered, classical []float64
	ratios := map[string][]float64{}
	methods := []string{"width", "dispersive", "coherence", "template"}
	for _, c := range []struct {
		width, end float64
		points     int
		length     float64
		window     band.Window
	}{
		{0.2, 90, 2048, 512, near16}, {0.35, 90, 1536, 512, near16}, {0.5, 90, 1024, 512, near16}, {0.7, 90, 1024, 512, near16},
		{1, 90, 1024, 512, near16}, {1.4, 90, 1024, 512, near16}, {2, 90, 1024, 512, near16},
		{2.8, 200, 1280, 960, band.Window{UpFar: -36, UpNear: -8, DownNear: 8, DownFar: 36}},
		{4, 200, 1280, 960, band.Window{UpFar: -36, UpNear: -10, DownNear: 10, DownFar: 36}},
		{5.6, 300, 1536, 1280, band.Window{UpFar: -56, UpNear: -14, DownNear: 14, DownFar: 56}},
		{8, 300, 1536, 1280, band.Window{UpFar: -56, UpNear: -18, DownNear: 18, DownFar: 56}},
	} {
		a := exact(t, ring(t, c.width, c.end, 1, c.points, c.length), c.window)
		widths, scattered, classical = append(widths, c.width), append(scattered, a.Scattered), append(classical, a.PredictedTemperature())
		for _, m := range methods {
			ratios[m] = append(ratios[m], a.temperatureBy(m)/a.Scattered)
		}
		ratios["κ/2π"] = append(ratios["κ/2π"], a.PredictedTemperature()/a.Scattered)
		t.Logf("width %g: scattering %.4f, κ/2π %.4f, strength %.3f, width %.3f dispersive %.3f coherence %.3f template %.3f of scattering", c.width, a.Scattered, a.PredictedTemperature(), a.Null.Strength,
			last(ratios["width"]), last(ratios["dispersive"]), last(ratios["coherence"]), last(ratios["template"]))
	}
	f := figure.Chart{Across: "width of the horizon", Unit: "ξ", LogX: true, Panels: []figure.ChartPanel{
		{Ordinate: "temperature (*mc*^{2}/*k*_{B})", Log: true, Lines: []figure.Curve{{Name: "scattering, low frequency", X: widths, Y: scattered}, {Name: "κ/2π", X: widths, Y: classical}}},
		{Ordinate: "over scattering", Log: true, Levels: []float64{1}, Lines: []figure.Curve{{Name: "κ/2π", X: widths, Y: ratios["κ/2π"]}, {Name: "width", X: widths, Y: ratios["width"]}}},
		{Ordinate: "over scattering", Levels: []float64{1}, Range: figure.Range{Min: 0.85, Max: 1.15}},
	}}
	for _, m := range methods[1:] {
		f.Panels[2].Lines = append(f.Panels[2].Lines, figure.Curve{Name: m, X: widths, Y: ratios[m]})
	}
	if err := f.Page().Save(folder, "thermometers"); err != nil {
		t.Fatal(err)
	}
}

func last(v []float64) float64 { return v[len(v)-1] }
