package report

import (
	"bytes"
	"encoding/base64"
	"fmt"
	"html/template"
	"io"

	"tailrace/analysis/interpretation"
)

// HTML writes the interpretation as one page that needs nothing else: figures
// are inside, and it prints on paper.
func (p *Interpretation) HTML(w io.Writer) error {
	u, it, a := p.Units, p.It, p.It.Account
	type row []string
	type picture struct {
		Source  template.URL
		Caption string
	}
	data := struct {
		Title, Verdict, Read, Entangled, Source, Checksum, Config, Version string
		Flow, Temperatures, Systematics, Explanations                      []row
		Assumptions                                                        []interpretation.Assumption
		Pictures                                                           []picture
		Warnings                                                           []string
	}{Title: p.Title, Verdict: p.Verdict(), Read: p.read(), Source: p.Source, Checksum: p.Checksum, Config: p.Config, Version: p.Version, Warnings: a.Warnings}
	for _, f := range p.Figures() {
		if f.Page == nil {
			continue
		}
		var b bytes.Buffer
		if err := f.Page.WriteSVG(&b); err != nil {
			return err
		}
		data.Pictures = append(data.Pictures, picture{template.URL("data:image/svg+xml;base64," + base64.StdEncoding.EncodeToString(b.Bytes())), f.Caption})
	}
	value := func(x float64, d Dimension) string { return fmt.Sprintf("%.4g", u.Value(x, d)) }
	data.Flow = []row{
		{u.named("density upstream", Density), value(a.Predicted.Upstream.Density, Density), value(a.Measured.Upstream.Density, Density) + " ± " + fmt.Sprintf("%.2g", u.Value(a.DensityError[0], Density))},
		{u.named("density downstream", Density), value(a.Predicted.Downstream.Density, Density), value(a.Measured.Downstream.Density, Density) + " ± " + fmt.Sprintf("%.2g", u.Value(a.DensityError[1], Density))},
		{u.named("velocity upstream", Speed), value(a.Predicted.Upstream.Velocity, Speed), "as predicted"},
		{u.named("velocity downstream", Speed), value(a.Predicted.Downstream.Velocity, Speed), value(a.Measured.Downstream.Velocity, Speed) + ", from the current"},
		{"κ/2π, as a temperature", p.say(a.Predicted.Horizon.Temperature), ""},
		{"emission at low frequency", p.say(a.Scattered), ""},
	}
	for _, t := range a.Readings {
		trust := "not trusted: "
		if t.Trusted {
			trust = "trusted: "
		}
		data.Temperatures = append(data.Temperatures, row{t.Method, p.say(t.Value), u.interval(t.Low, t.High, Temperature),
			fmt.Sprintf("%.2f", t.Value/a.Predicted.Horizon.Temperature), fmt.Sprintf("%.2f", t.Value/a.Scattered), trust + t.Why})
	}
	for _, v := range it.Systematics {
		data.Systematics = append(data.Systematics, row{v.What, fmt.Sprintf("%.2f", v.Strength), p.orNone(v.Dispersive), p.orNone(v.Template)})
	}
	for _, e := range it.Explanations {
		data.Explanations = append(data.Explanations, row{e.Name, p.explanationValue(e), fmt.Sprintf("%.2g", e.PValue), found(e.Found), e.Why})
	}
	if it.Separability != nil {
		data.Entangled, data.Assumptions = p.entangled(), it.Separability.Assumptions
	}
	return page.Execute(w, data)
}

var page = template.Must(template.New("report").Parse(`<!doctype html>
<html lang="en">
<head>
<meta charset="utf-8">
<meta name="viewport" content="width=device-width, initial-scale=1">
<title>{{.Title}}</title>
<style>
body { font: 16px/1.5 "Liberation Sans", Arial, Helvetica, sans-serif; color: #111; background: #fff; max-width: 54rem; margin: 2rem auto; padding: 0 1rem; }
h1 { font-size: 1.5rem; margin-bottom: .3rem; }
h2 { font-size: 1.15rem; margin: 2rem 0 .5rem; border-bottom: 1px solid #bbb; }
.verdict { font-size: 1.1rem; background: #eef3f9; border-left: 4px solid #0072b2; padding: .8rem 1rem; }
table { border-collapse: collapse; width: 100%; font-size: .9rem; }
th, td { text-align: left; vertical-align: top; padding: .25rem .7rem .25rem 0; border-bottom: 1px solid #ddd; }
th { font-weight: 600; }
td:first-child { white-space: nowrap; }
figure { margin: 1.2rem 0; break-inside: avoid; }
img { width: 100%; max-width: 42rem; }
figcaption { font-size: .9rem; color: #444; }
code { font-size: .85rem; word-break: break-all; }
@media print { body { font-size: 10pt; margin: 0; max-width: none; } h2 { break-after: avoid; } tr { break-inside: avoid; } }
</style>
</head>
<body>
<h1>{{.Title}}</h1>
<p class="verdict">{{.Verdict}}</p>
<p>{{.Read}}.</p>
{{with index .Pictures 0}}<figure><img src="{{.Source}}" alt="{{.Caption}}"><figcaption>{{.Caption}}</figcaption></figure>{{end}}
<h2>Flow</h2>
<table><tr><th></th><th>theory</th><th>measured</th></tr>{{range .Flow}}<tr>{{range .}}<td>{{.}}</td>{{end}}</tr>{{end}}</table>
<h2>Temperatures</h2>
<table><tr><th>method</th><th>value</th><th>68 % interval</th><th>of κ/2π</th><th>of emission</th><th></th></tr>{{range .Temperatures}}<tr>{{range .}}<td>{{.}}</td>{{end}}</tr>{{end}}</table>
{{range $i, $p := .Pictures}}{{if $i}}<figure><img src="{{$p.Source}}" alt="{{$p.Caption}}"><figcaption>{{$p.Caption}}</figcaption></figure>{{end}}{{end}}
<h2>What the choices of the analysis do</h2>
<table><tr><th>choice</th><th>strength</th><th>dispersive</th><th>template</th></tr>{{range .Systematics}}<tr>{{range .}}<td>{{.}}</td>{{end}}</tr>{{end}}</table>
<h2>Duller explanations</h2>
<table><tr><th>cause</th><th>value</th><th>p</th><th></th><th></th></tr>{{range .Explanations}}<tr>{{range .}}<td>{{.}}</td>{{end}}</tr>{{end}}</table>
{{if .Entangled}}<h2>Partners</h2>
<p>{{.Entangled}}.</p>
<table><tr><th>assumption</th><th></th><th></th></tr>{{range .Assumptions}}<tr><td style="white-space:normal">{{.What}}</td><td>{{if .OK}}holds{{else}}does not hold{{end}}</td><td>{{.Why}}</td></tr>{{end}}</table>{{end}}
{{if .Warnings}}<h2>Warnings</h2><ul>{{range .Warnings}}<li>{{.}}</li>{{end}}</ul>{{end}}
<h2>Provenance</h2>
<table>
<tr><td>shots</td><td>{{.Source}}</td></tr>
<tr><td>SHA-256</td><td><code>{{.Checksum}}</code></td></tr>
<tr><td>config</td><td>{{.Config}}</td></tr>
<tr><td>program</td><td>tailrace {{.Version}}</td></tr>
</table>
<p>The beams that trap the cloud and make the step are class 3B or class 4 lasers: settings found here go through the laser-safety officer and the local rules.</p>
</body>
</html>
`))
