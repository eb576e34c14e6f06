package figure

import (
	"bytes"
	"io"
	"path/filepath"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
	"gonum.org/v1/plot/vg/vgimg"
	"gonum.org/v1/plot/vg/vgsvg"

	"tailrace/analysis/npz/whole"
)

// Page is a figure laid out. The same page always gives the same bytes.
type Page struct {
	width, height vg.Length
	draw          func(c draw.Canvas)
}

// Save writes name.png, 1600 pixels wide, and name.svg into the folder dir,
// which must exist. A file appears under its name only when it is whole.
func (p *Page) Save(dir, name string) error {
	if err := whole.WriteFile(filepath.Join(dir, name+".png"), p.WritePNG); err != nil {
		return err
	}
	return whole.WriteFile(filepath.Join(dir, name+".svg"), p.WriteSVG)
}

// WritePNG writes the page as a PNG picture.
func (p *Page) WritePNG(w io.Writer) error {
	c := vgimg.NewWith(vgimg.UseWH(p.width, p.height), vgimg.UseDPI(dpi))
	p.draw(draw.New(c))
	_, err := vgimg.PngCanvas{Canvas: c}.WriteTo(w)
	return err
}

// WriteSVG writes the page as an SVG picture. Its fonts are not embedded; where
// Liberation Sans is not installed, Arial or Helvetica have the same widths.
func (p *Page) WriteSVG(w io.Writer) error {
	c := vgsvg.New(p.width, p.height)
	p.draw(draw.New(c))
	var b bytes.Buffer
	if _, err := c.WriteTo(&b); err != nil {
		return err
	}
	_, err := w.Write(bytes.ReplaceAll(b.Bytes(), []byte("font-family:Liberation Sans;"),
		[]byte("font-family:Liberation Sans,Arial,Helvetica,sans-serif;")))
	return err
}
