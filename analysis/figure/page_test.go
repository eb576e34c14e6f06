package figure

import (
	"bytes"
	"encoding/xml"
	"errors"
	"image"
	"image/color"
	"image/png"
	"io"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"gonum.org/v1/plot/vg/draw"
	"gonum.org/v1/plot/vg/vgimg"
)

func render(t *testing.T, p *Page) (picture image.Image, pngBytes, svgBytes []byte) {
	t.Helper()
	var a, b bytes.Buffer
	if err := p.WritePNG(&a); err != nil {
		t.Fatal(err)
	}
	if err := p.WriteSVG(&b); err != nil {
		t.Fatal(err)
	}
	picture, err := png.Decode(bytes.NewReader(a.Bytes()))
	if err != nil {
		t.Fatal(err)
	}
	return picture, a.Bytes(), b.Bytes()
}

func isWhite(c color.Color) bool {
	r, g, b, _ := c.RGBA()
	return r>>8 > 250 && g>>8 > 250 && b>>8 > 250
}

// words is the text of an SVG, which must be well-formed.
func words(t *testing.T, svg []byte) string {
	t.Helper()
	var all strings.Builder
	d := xml.NewDecoder(bytes.NewReader(svg))
	for {
		token, err := d.Token()
		if errors.Is(err, io.EOF) {
			return all.String()
		}
		if err != nil {
			t.Fatalf("the SVG is not well-formed: %v", err)
		}
		if c, ok := token.(xml.CharData); ok {
			all.WriteString(strings.TrimSpace(string(c)) + " ")
		}
	}
}

// What a reader must find in each figure.
var said = map[string][]string{
	"flow":        {"stationary flow", "horizon", "upstream window", "downstream window", "(µm)", "(atoms/µm)", "−20", "mean of 2000"},
	"flow_dots":   {"stationary flow", "horizon"},
	"map":         {"predicted band", "analysis window", "(×10", "−3", "′", "40"},
	"cut":         {"measured", "fit", "68 % band of the fit", "predicted, thermal", "predicted, exact scattering", "(ms)", "(×10"},
	"spacetime":   {"step", "characteristics", "(ms)", "(atoms/µm)", "(µm)"},
	"growth":      {"mode from 2", "mode from 6", "thresholds", "this cavity", "growth rate", "frequency", "length", "(µm)"},
	"growth_many": {"modes, a line each", "thresholds", "this cavity"},
	"patterns":    {"at one moment", "a quarter of a period later", "envelope", "between the horizons", "mode 1: frequency", "mode 2: does not oscillate", "/ largest", "(µm)"},
	"null":        {"shuffled between shots", "measured", "6.2 standard deviations", "shuffles per bin", "(×10"},
}

func TestPages(t *testing.T) {
	again := examples()
	for name, page := range examples() {
		t.Run(name, func(t *testing.T) {
			picture, first, svg := render(t, page)
			_, second, svg2 := render(t, again[name])
			if !bytes.Equal(first, second) || !bytes.Equal(svg, svg2) {
				t.Error("two drawings differ")
			}
			b := picture.Bounds()
			if b.Dx() != 1600 || b.Dy() < 700 || b.Dy() > 1600 {
				t.Errorf("the picture is %v", b)
			}
			// A label that runs out of the page leaves ink on its rim.
			const rim = 4
			for x := range b.Dx() {
				for y := range b.Dy() {
					if (x < rim || y < rim || x >= b.Dx()-rim || y >= b.Dy()-rim) && !isWhite(picture.At(x, y)) {
						t.Fatalf("ink at %d, %d, on the rim of %v", x, y, b)
					}
				}
			}
			text := words(t, svg)
			for _, s := range said[name] {
				if !strings.Contains(text, s) {
					t.Errorf("%q is not said in %q", s, text)
				}
			}
			if len(svg) > 1<<20 { // to be sent by mail and shown by a browser
				t.Errorf("the SVG has %d bytes", len(svg))
			}
			if !bytes.Contains(svg, []byte("Liberation Sans,Arial")) {
				t.Error("the SVG names no other font")
			}
		})
	}
}

func TestSave(t *testing.T) {
	folder := t.TempDir()
	if err := exampleNull().Page().Save(folder, "null"); err != nil {
		t.Fatal(err)
	}
	entries, _ := os.ReadDir(folder)
	if len(entries) != 2 || entries[0].Name() != "null.png" || entries[1].Name() != "null.svg" {
		t.Errorf("the folder holds %v", entries)
	}
	if err := exampleNull().Page().Save(filepath.Join(folder, "none"), "null"); !errors.Is(err, os.ErrNotExist) {
		t.Errorf("missing folder: %v", err)
	}
}

// Value[i*n+j] belongs to x' = Position[i], upwards, and x = Position[j].
func TestMapOrientation(t *testing.T) {
	value := make([]float64, 16)
	value[3*4+0] = -1 // x' last, x first: top left
	value[0*4+3] = 1  // bottom right
	value[0] = math.NaN()
	picture, _, _ := render(t, Map{Position: []float64{0, 1, 2, 3}, Value: value, Limit: 1, Horizon: 1.5}.Page())
	p := newPanel(blankCanvas(), marginLeft, marginBottom, pageWidth-marginLeft-barGap-barWidth-barMargin,
		pageWidth-marginLeft-barGap-barWidth-barMargin, Range{-0.5, 3.5}, Range{-0.5, 3.5})
	ends := diverging()
	for _, c := range []struct {
		name  string
		x, xp float64
		want  color.Color
	}{
		{"top left", 0, 3, ends[0]},
		{"bottom right", 3, 0, ends[len(ends)-1]},
		{"top right", 3, 3, ends[len(ends)/2]},
		{"not a number", 0, 0, blank},
	} {
		at := p.at(c.x+0.1, c.xp+0.1)
		got := picture.At(int(at.X/pixel), picture.Bounds().Dy()-int(at.Y/pixel))
		if r, g, b, _ := got.RGBA(); !near(c.want, r, g, b) {
			t.Errorf("%s: %v, want %v", c.name, got, c.want)
		}
	}
}

func near(want color.Color, r, g, b uint32) bool {
	x, y, z, _ := want.RGBA()
	d := func(a, b uint32) float64 { return math.Abs(float64(a)-float64(b)) / 256 }
	return d(x, r) < 2 && d(y, g) < 2 && d(z, b) < 2 // rounding of 8 bits
}

// Numbers that are missing, level or not finite must give a page all the same.
func TestPoorData(t *testing.T) {
	nan, inf := math.NaN(), math.Inf(1)
	bad := []float64{nan, inf, nan, nan}
	x := []float64{0, 1, 2, 3}
	level := []float64{2, 2, 2, 2}
	hair := []float64{1, 1 + 1e-13, 1, 1 - 1e-13}
	for name, page := range map[string]*Page{
		"flow of nothing":    Flow{}.Page(),
		"flow not finite":    Flow{Density: Points{"n", x, bad, bad}, Mach: Points{"", x, bad, nil}, Horizon: nan}.Page(),
		"flow level":         Flow{Density: Points{"n", x, level, nil}, Mach: Points{"", x, hair, bad}, Horizon: 1}.Page(),
		"flow of one point":  Flow{Density: Points{"n", x[:1], level[:1], nil}, Horizon: nan}.Page(),
		"map of zeros":       Map{Position: []float64{0, 1}, Value: make([]float64, 4)}.Page(),
		"map not finite":     Map{Position: []float64{0, 1}, Value: bad, Limit: nan, Horizon: nan}.Page(),
		"cut of nothing":     Cut{}.Page(),
		"cut not finite":     Cut{Measured: Points{"m", x, bad, level}, Fit: Curve{"f", x, bad}, Low: bad, High: bad}.Page(),
		"cut tiny":           Cut{Measured: Points{"m", x, []float64{1e-12, -3e-12, 0, 2e-12}, nil}}.Page(),
		"space-time level":   SpaceTime{Position: x[:2], Time: x[:2], Density: level}.Page(),
		"space-time not":     SpaceTime{Position: x[:2], Time: x[:2], Density: bad}.Page(),
		"growth of nothing":  Growth{}.Page(),
		"growth not finite":  Growth{Branches: []Branch{{"m", x, bad, bad}, {"", x, level, hair}}, Thresholds: bad, Length: nan}.Page(),
		"patterns of zeros":  Patterns{Position: x, Shapes: []Shape{{"m", make([]float64, 4), make([]float64, 4), make([]float64, 4)}}}.Page(),
		"patterns not":       Patterns{Position: x, Shapes: []Shape{{"m", bad, bad, bad}}, Inside: Range{nan, 1}}.Page(),
		"null of nothing":    Null{Measured: nan, Note: "none"}.Page(),
		"null of one value":  Null{Shuffled: level, Measured: 2}.Page(),
		"null with outliers": Null{Shuffled: []float64{0, 0, 0, 0, 0, 0, 0, 1e6, nan}, Measured: 1e6, Note: "at the right rim"}.Page(),
	} {
		t.Run(name, func(t *testing.T) {
			page.draw(draw.New(vgimg.New(page.width, page.height))) // a panic of the rasteriser would show
			var b bytes.Buffer
			if err := page.WriteSVG(&b); err != nil {
				t.Fatal(err)
			}
			svg := b.Bytes()
			if text := words(t, svg); strings.Contains(text, "NaN") || strings.Contains(text, "Inf") {
				t.Errorf("it says %q", text)
			}
			if bytes.Contains(svg, []byte("NaN")) || bytes.Contains(svg, []byte("+Inf")) {
				t.Error("a coordinate is not a number")
			}
		})
	}
}

func TestMistakesPanic(t *testing.T) {
	two, three := []float64{1, 2}, []float64{1, 2, 3}
	for name, page := range map[string]func(){
		"y without x":              func() { Flow{Density: Points{"", two, three, nil}}.Page() },
		"errors of another count":  func() { Flow{Density: Points{"", two, two, three}}.Page() },
		"curve of another count":   func() { Flow{PredictedMach: Curve{"", two, three}}.Page() },
		"map not square":           func() { Map{Position: two, Value: three}.Page() },
		"map of falling axis":      func() { Map{Position: []float64{1, 0}, Value: make([]float64, 4)}.Page() },
		"map of one cell":          func() { Map{Position: two[:1], Value: two[:1]}.Page() },
		"band without its high":    func() { Cut{Fit: Curve{"", two, two}, Low: two}.Page() },
		"band of another count":    func() { Cut{Fit: Curve{"", two, two}, Low: three, High: three}.Page() },
		"four predictions":         func() { Cut{Predicted: make([]Curve, 4)}.Page() },
		"branch without a rate":    func() { Growth{Branches: []Branch{{"", two, two, three}}}.Page() },
		"patterns of no modes":     func() { Patterns{Position: two}.Page() },
		"pattern of another count": func() { Patterns{Position: two, Shapes: []Shape{{"", two, two, three}}}.Page() },
		"space-time not a grid":    func() { SpaceTime{Position: two, Time: two, Density: three}.Page() },
	} {
		t.Run(name, func(t *testing.T) {
			defer func() {
				if s, ok := recover().(string); !ok || !strings.HasPrefix(s, "figure: ") {
					t.Errorf("recovered %q, want a panic of figure", s)
				}
			}()
			page()
		})
	}
}
