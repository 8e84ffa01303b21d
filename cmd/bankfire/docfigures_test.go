package main

import (
	"bytes"
	"image"
	"image/color"
	"image/png"
	"math"
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"testing"

	"golang.org/x/image/draw"
)

// shownFigure is a figure in a README file of an example: STUDY-FIGURE.png is FIGURE.png
// among the results of STUDY.toml, at half its size.
var shownFigure = regexp.MustCompile(`\((study|[a-z-]+?)-((?:weigh|family)(?:-\d+)?\.png)\)`)

// allowedShade is by how much the shades of figures may differ in the mean, of 255: on
// another processor round-off may move a line by a fraction of a pixel. A path of four
// that is one degree hotter makes 0.2.
const allowedShade = 0.01

// TestDocFigures draws every figure that a README file of an example shows, and compares.
func TestDocFigures(t *testing.T) {
	files, err := filepath.Glob(filepath.Join("..", "..", "examples", "*", "README.md"))
	if err != nil {
		t.Fatal(err)
	}
	shown := 0
	for _, name := range files {
		text, err := os.ReadFile(name)
		if err != nil {
			t.Fatal(err)
		}
		for _, m := range shownFigure.FindAllSubmatch(text, -1) {
			shown++
			study, file := string(m[1]), string(m[2])
			t.Run(filepath.Base(filepath.Dir(name))+"/"+study+"-"+file, func(t *testing.T) {
				sameFigure(t, filepath.Dir(name), study, file)
			})
		}
	}
	if shown == 0 {
		t.Error("no figure is shown")
	}
}

// sameFigure compares the figure in the folder with that which is drawn now.
func sameFigure(t *testing.T, folder, study, file string) {
	out := filepath.Join(t.TempDir(), "results")
	var stdout, stderr bytes.Buffer
	line := []string{"weigh", filepath.Join(folder, study+".toml"), "--out", out, "--quiet"}
	if status := run(line, strings.NewReader(""), &stdout, &stderr); status != done {
		t.Fatalf("bankfire %s: status %d\n%s", strings.Join(line, " "), status, &stderr)
	}
	got := halved(readPNG(t, filepath.Join(out, file)))
	name := filepath.Join(folder, study+"-"+file)
	if *update {
		var b bytes.Buffer
		if err := (&png.Encoder{CompressionLevel: png.BestCompression}).Encode(&b, got); err != nil {
			t.Fatal(err)
		}
		if err := os.WriteFile(name, b.Bytes(), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	want := readPNG(t, name)
	if got.Bounds() != want.Bounds() {
		t.Fatalf("%s is %v, drawn now %v", name, want.Bounds(), got.Bounds())
	}
	if d := shade(got, want); d > allowedShade {
		t.Errorf("%s differs by %.2g of 255 in the mean; after looking at the new one, go test ./cmd/bankfire -run TestDocFigures -update", name, d)
	}
}

func readPNG(t *testing.T, name string) image.Image {
	t.Helper()
	f, err := os.Open(name)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	m, err := png.Decode(f)
	if err != nil {
		t.Fatalf("%s: %v", name, err)
	}
	return m
}

func halved(m image.Image) *image.NRGBA {
	b := m.Bounds()
	out := image.NewNRGBA(image.Rect(0, 0, b.Dx()/2, b.Dy()/2))
	draw.CatmullRom.Scale(out, out.Bounds(), m, b, draw.Src, nil)
	return out
}

// shade is the mean difference of the shades of two pictures of one size.
func shade(a, b image.Image) float64 {
	sum, r := 0.0, a.Bounds()
	for y := r.Min.Y; y < r.Max.Y; y++ {
		for x := r.Min.X; x < r.Max.X; x++ {
			p, q := color.GrayModel.Convert(a.At(x, y)).(color.Gray), color.GrayModel.Convert(b.At(x, y)).(color.Gray)
			sum += math.Abs(float64(p.Y) - float64(q.Y))
		}
	}
	return sum / float64(r.Dx()*r.Dy())
}
