package traverse

import (
	"errors"
	"fmt"
	"math"
	"os"
	"strings"
	"testing"
	"unicode/utf16"

	"github.com/google/go-cmp/cmp"

	"bankfire/thermal"
)

// standard is how most files below are read.
func standard() Options {
	return Options{Position: "distance [um]", Value: "Ti [ppm]", Errors: Errors{Column: "2se [ppm]", Sigmas: 2}}
}

const header = "distance [um],Ti [ppm],2se [ppm]\n"

// near compares traverses to the last digits of a unit's conversion.
var near = cmp.Comparer(func(a, b float64) bool { return !apart(a, b, 1e-12*math.Abs(b)) })

// readings are files that Read accepts. They are seeds of the fuzz target too.
var readings = []struct {
	name   string
	text   string
	change func(o *Options)
	want   Traverse // Name, Line, Spot and Notes are filled in
	lines  []int
	notes  []string // without the file's name
}{
	{name: "commas", text: header + "0,50,4\n10,60,2\n",
		want: Traverse{Position: []float64{0, 10e-6}, Value: []float64{50, 60}, Sigma: []float64{2, 1}}, lines: []int{2, 3}},
	{name: "tabs, blanks, no last line end", text: "Ti [ppm] \t distance  [um]\t2se [ppm]\n\n50\t1e1\t4",
		want: Traverse{Position: []float64{10e-6}, Value: []float64{50}, Sigma: []float64{2}}, lines: []int{3}},
	{name: "semicolons in a file with commas in words", text: "distance [um];Ti [ppm];2se [ppm];remark, if any\n1;50;4;clean, bright\n",
		want: Traverse{Position: []float64{1e-6}, Value: []float64{50}, Sigma: []float64{2}}, lines: []int{2}},
	{name: "quotes", text: "\"distance [um]\",\"Ti [ppm]\",\"2se [ppm]\",\"remark\"\n\"1\", 50 ,\"4\" ,\"a \"\"b\"\", c\"\n",
		want: Traverse{Position: []float64{1e-6}, Value: []float64{50}, Sigma: []float64{2}}, lines: []int{2}},
	{name: "falling", text: header + "9,50,2\n3,60,2\n-1,55,2\n",
		want: Traverse{Position: []float64{9e-6, 3e-6, -1e-6}, Value: []float64{50, 60, 55}, Sigma: []float64{1, 1, 1}}, lines: []int{2, 3, 4}},
	{name: "from the rim", text: header + "0,50,2\n3,60,2\n", change: func(o *Options) { o.Zero, o.Size = Rim, 10e-6 },
		want: Traverse{Position: []float64{10e-6, 7e-6}, Value: []float64{50, 60}, Sigma: []float64{1, 1}}, lines: []int{2, 3}},
	{name: "units of other families and spellings", text: "x [mm],\"Ti [wt. %]\",err [µg/g]\n0.01,0.005,2\n",
		change: func(o *Options) {
			o.Position, o.Value, o.Errors = "x", "Ti", Errors{Column: "err", Sigmas: 1, Floor: Amount{3, "ppm"}}
		},
		want: Traverse{Unit: "wt%", Position: []float64{10e-6}, Value: []float64{0.005}, Sigma: []float64{3e-4}}, lines: []int{2}},
	{name: "units in round brackets", text: "distance (um),Ti (rim) (wt%),2se (ppm)\n1,0.005,4\n",
		change: func(o *Options) {
			o.Position, o.Value, o.Errors = "distance [um]", "Ti (rim)", Errors{Column: "2se (ppm)", Sigmas: 2}
		},
		want: Traverse{Unit: "wt%", Position: []float64{1e-6}, Value: []float64{0.005}, Sigma: []float64{2e-4}}, lines: []int{2}},
	{name: "unit named by the user only", text: "x,XAn\n1,0.55\n",
		change: func(o *Options) {
			o.Position, o.Value, o.Errors = "x [um]", "XAn [mole fraction]", Errors{Constant: Amount{0.01, "mole fraction"}}
		},
		want: Traverse{Unit: "mole fraction", Position: []float64{1e-6}, Value: []float64{0.55}, Sigma: []float64{0.01}}, lines: []int{2}},
	{name: "per cent with a floor", text: "distance [um],Ti [ppm]\n1,50\n2,-0.5\n",
		change: func(o *Options) { o.Errors = Errors{Percent: 4, Floor: Amount{1, "ppm"}} },
		want:   Traverse{Position: []float64{1e-6, 2e-6}, Value: []float64{50, -0.5}, Sigma: []float64{2, 1}}, lines: []int{2, 3},
		notes: []string{"1 value below zero kept"}},
	{name: "per cent of per cent", text: "distance [um],An [%]\n1,50\n",
		change: func(o *Options) { o.Value, o.Errors = "An", Errors{Percent: 4} },
		want:   Traverse{Unit: "An", Position: []float64{1e-6}, Value: []float64{50}, Sigma: []float64{2}}, lines: []int{2},
		notes: []string{"errors of 4 % are taken of each value, not of the whole"}},
	{name: "sigmas not said", text: header + "1,50,4\n", change: func(o *Options) { o.Errors.Sigmas = 0 },
		want: Traverse{Position: []float64{1e-6}, Value: []float64{50}, Sigma: []float64{4}}, lines: []int{2},
		notes: []string{`column "2se [ppm]" read as one standard deviation`}},
	{name: "window", text: header + "-5,?,4\n0,50,2\n3,60,2\n4,b.d.,\n", change: func(o *Options) { o.To = 3e-6 },
		want: Traverse{Position: []float64{0, 3e-6}, Value: []float64{50, 60}, Sigma: []float64{1, 1}}, lines: []int{3, 4},
		notes: []string{"2 rows outside the window 0 um to 3 um left out"}},
	{name: "marks", text: "distance [um],Ti [ppm],2se [ppm],skip\n0,50,2,\n0,crack,,x\n3,60,2,no\n,,,Yes\n", change: func(o *Options) { o.Skip = "skip" },
		want: Traverse{Position: []float64{0, 3e-6}, Value: []float64{50, 60}, Sigma: []float64{1, 1}}, lines: []int{2, 4},
		notes: []string{`2 rows left out by column "skip"`}},
	{name: "limits of detection", text: header + "0,50,2\n1,<6,\n2,< 0.03,bdl\n3,4,2\n", change: func(o *Options) { o.Below = AsLimit },
		want: Traverse{Position: []float64{0, 1e-6, 2e-6, 3e-6}, Value: []float64{50, 6, 0.03, 4}, Sigma: []float64{1, 2, 0.01, 1},
			Limit: []bool{false, true, true, false}}, lines: []int{2, 3, 4, 5},
		notes: []string{"2 values below detection used as limits"}},
	{name: "below detection left out", text: header + "0,50,2\n1,<6,\n2,b.d.l.,\n3,<LOD,1\n4,4,2\n", change: func(o *Options) { o.Below = LeftOut },
		want: Traverse{Position: []float64{0, 4e-6}, Value: []float64{50, 4}, Sigma: []float64{1, 1}}, lines: []int{2, 6},
		notes: []string{"3 values below detection left out"}},
	{name: "standard error of a number of analyses", text: header + "0,50,6\n", change: func(o *Options) { o.Errors = Errors{Column: "2se [ppm]", Sigmas: 2, Analyses: 9} },
		want: Traverse{Position: []float64{0}, Value: []float64{50}, Sigma: []float64{1}}, lines: []int{2}},
	{name: "standard errors with a column of numbers", text: "x [um],Ti [ppm],sd [ppm],n,skip\n0,50,6,9,\n1,50,6,4,\n2,50,6,,x\n",
		change: func(o *Options) {
			o.Position, o.Skip, o.Errors = "x [um]", "skip", Errors{Column: "sd [ppm]", Counts: "n"}
		},
		want: Traverse{Position: []float64{0, 1e-6}, Value: []float64{50, 50}, Sigma: []float64{2, 3}}, lines: []int{2, 3},
		notes: []string{`1 row left out by column "skip"`}},
	{name: "column of errors in per cent of each value", text: "distance [um],Ti [ppm],rsd [%]\n0,50,4\n1,-20,10\n", change: func(o *Options) { o.Errors = Errors{Column: "rsd [%]", Sigmas: 2} },
		want: Traverse{Position: []float64{0, 1e-6}, Value: []float64{50, -20}, Sigma: []float64{1, 1}}, lines: []int{2, 3},
		notes: []string{"1 value below zero kept", `column "rsd [%]" is taken as per cent of each value`}},
	{name: "the same of wt%, said so", text: "distance [um],Ti [wt%],rsd [rel. %]\n0,0.5,4\n", change: func(o *Options) { o.Value, o.Errors = "Ti", Errors{Column: "rsd", Sigmas: 1} },
		want: Traverse{Unit: "wt%", Position: []float64{0}, Value: []float64{0.5}, Sigma: []float64{0.02}}, lines: []int{2},
		notes: []string{`column "rsd" is taken as per cent of each value`}},
	{name: "column of errors in per cent of the whole", text: "distance [um],Or [%],err [%]\n0,50,4\n", change: func(o *Options) { o.Value, o.Errors = "Or", Errors{Column: "err", Sigmas: 2} },
		want: Traverse{Unit: "%", Position: []float64{0}, Value: []float64{50}, Sigma: []float64{2}}, lines: []int{2},
		notes: []string{`column "err" is taken as per cent of the whole, like the values`}},
	{name: "grey levels", text: "distance [um],BSE [grey],err [grey]\n0,120,2\n1,300,2\n", change: func(o *Options) { o.Value, o.Errors = "BSE [grey]", Errors{Column: "err", Sigmas: 2} },
		want: Traverse{Unit: "grey", Grey: true, Position: []float64{0, 1e-6}, Value: []float64{120, 300}, Sigma: []float64{1, 1}}, lines: []int{2, 3}},
	{name: "forsterite with errors in mol%", text: "distance [um],x [Fo],err [mol%]\n0,88,1\n", change: func(o *Options) {
		o.Value, o.Errors = "x [Fo]", Errors{Column: "err", Sigmas: 2, Floor: Amount{0.002, "mole fraction"}}
	},
		want: Traverse{Unit: "Fo", Position: []float64{0}, Value: []float64{88}, Sigma: []float64{0.5}}, lines: []int{2}},
	{name: "beyond the rim by an uncertain zero", text: header + "-0.5,50,2\n1,50,2\n", change: func(o *Options) { o.Zero, o.Size, o.Beyond = Rim, 10e-6, 1e-6 },
		want: Traverse{Position: []float64{10.5e-6, 9e-6}, Value: []float64{50, 50}, Sigma: []float64{1, 1}}, lines: []int{2, 3}},
	{name: "comments and empty rows", text: "# HF-12, spot 0.8 um\n\n" + header + ",,\n1,50,2,,\n# lost the beam\n2,60,2\n",
		want: Traverse{Position: []float64{1e-6, 2e-6}, Value: []float64{50, 60}, Sigma: []float64{1, 1}}, lines: []int{5, 7},
		notes: []string{"1 comment line skipped, the first on line 6"}},
	{name: "decimal commas", text: "distance [um];Ti [ppm];2se [ppm]\n0,5;50,25;2\n1;1,250;2\n",
		want: Traverse{Position: []float64{0.5e-6, 1e-6}, Value: []float64{50.25, 1.25}, Sigma: []float64{1, 1}}, lines: []int{2, 3},
		notes: []string{"decimal commas read"}},
	{name: "typographic minus", text: header + "−1,50,2\n",
		want: Traverse{Position: []float64{-1e-6}, Value: []float64{50}, Sigma: []float64{1}}, lines: []int{2}},
	{name: "byte-order mark and Windows line ends", text: "\ufeff" + strings.ReplaceAll(header+"1,50,2\n", "\n", "\r\n"),
		want: Traverse{Position: []float64{1e-6}, Value: []float64{50}, Sigma: []float64{1}}, lines: []int{2},
		notes: []string{"byte-order mark left out", "Windows line ends read"}},
	{name: "old line ends", text: strings.ReplaceAll(header+"1,50,2\n", "\n", "\r"),
		want: Traverse{Position: []float64{1e-6}, Value: []float64{50}, Sigma: []float64{1}}, lines: []int{2},
		notes: []string{"lines end in carriage returns alone"}},
	{name: "Windows-1252", text: "distance [\xb5m],Ti [ppm],2se [ppm]\n1,50,2\n",
		want: Traverse{Position: []float64{1e-6}, Value: []float64{50}, Sigma: []float64{1}}, lines: []int{2},
		notes: []string{"read as Windows-1252, since it is not UTF-8"}},
	{name: "UTF-16 little end first", text: inUTF16("distance [µm]\tTi [ppm]\t2se [ppm]\n1\t50\t2\n", false),
		want: Traverse{Position: []float64{1e-6}, Value: []float64{50}, Sigma: []float64{1}}, lines: []int{2},
		notes: []string{"read as UTF-16, as its byte-order mark says"}},
	{name: "UTF-16 big end first", text: inUTF16(header+"1,50,2\n", true),
		want: Traverse{Position: []float64{1e-6}, Value: []float64{50}, Sigma: []float64{1}}, lines: []int{2},
		notes: []string{"read as UTF-16, as its byte-order mark says"}},
}

func TestRead(t *testing.T) {
	for _, test := range readings {
		t.Run(test.name, func(t *testing.T) {
			o := standard()
			o.Spot = Spot{Gaussian, 1e-6}
			if test.change != nil {
				test.change(&o)
			}
			got, err := Read("ti.csv", strings.NewReader(test.text), o)
			if err != nil {
				t.Fatal(err)
			}
			want := test.want
			want.Name, want.Spot, want.Line = "ti.csv", o.Spot, test.lines
			want.Zero, want.Size = o.Zero, o.Size
			if want.Unit == "" {
				want.Unit = "ppm"
			}
			for _, n := range test.notes {
				want.Notes = append(want.Notes, "ti.csv: "+n)
			}
			if diff := cmp.Diff(&want, got, near); diff != "" {
				t.Errorf("wanted -, got +:\n%s", diff)
			}
		})
	}
}

// inUTF16 is a text in UTF-16 with its byte-order mark.
func inUTF16(text string, bigFirst bool) string {
	var b []byte
	for _, u := range utf16.Encode([]rune("\ufeff" + text)) {
		low, high := byte(u), byte(u>>8)
		if bigFirst {
			low, high = high, low
		}
		b = append(b, low, high)
	}
	return string(b)
}

// refusals are files that Read refuses, each with the errors it must give. They
// are seeds of the fuzz target too.
var refusals = []struct {
	name, text string
	change     func(o *Options)
	want       []string
}{
	{name: "empty", text: "", want: []string{`ti.csv: empty; want a header and at least one row`}},
	{name: "blank", text: " \n\t\n", want: []string{`ti.csv: empty; want a header and at least one row`}},
	{name: "only a byte-order mark", text: "\xff\xfe", want: []string{`ti.csv: empty; want a header and at least one row`}},
	{name: "only comments", text: "# one\n# two\n", want: []string{`ti.csv:2:1: nothing but blank lines and comments; want a header and at least one row`}},
	{name: "only a header", text: header, want: []string{`ti.csv: no rows below the header; want at least one`}},
	{name: "zero bytes", text: "distance\x00", want: []string{`ti.csv: not a text: it holds zero bytes; save the table as CSV in UTF-8`}},
	{name: "control characters", text: header + "1,\x022,3\n", want: []string{`ti.csv:2:3: not a text: it holds control characters; save the table as CSV in UTF-8`}},
	{name: "workbook", text: "PK\x03\x04...", want: []string{`ti.csv: a spreadsheet workbook, not a text table; save the sheet as CSV in UTF-8`}},
	{name: "no header", text: "0,50,4\n10,60,2\n", want: []string{
		`ti.csv:1:1: column "distance [um]": not in the header; the columns are "0", "50", "4"`,
		`ti.csv:1:1: column "Ti [ppm]": not in the header; the columns are "0", "50", "4"`,
		`ti.csv:1:1: column "2se [ppm]": not in the header; the columns are "0", "50", "4"`}},
	{name: "header behind #", text: "# distance [um],Ti [ppm],2se [ppm]\n0,50,4\n", change: func(o *Options) { o.Errors = Errors{Percent: 1} }, want: []string{
		`ti.csv:2:1: column "distance [um]": not in the header; the columns are "0", "50", "4"; lines that begin with # are comments, a header must not`,
		`ti.csv:2:1: column "Ti [ppm]": not in the header; the columns are "0", "50", "4"; lines that begin with # are comments, a header must not`}},
	{name: "no unit", text: "x,Ti [ppm],2se [ppm]\n1,50,2\n", change: func(o *Options) { o.Position = "x" }, want: []string{
		`ti.csv:1:1: column "x": no unit; write, for example, "x [um]"`}},
	{name: "no unit but a name in brackets", text: "distance (um),Ti (rim)\n1,50\n", change: func(o *Options) { o.Value, o.Errors = "Ti (rim)", Errors{Percent: 4} }, want: []string{
		`ti.csv:1:15: column "Ti (rim)": no unit; write, for example, "Ti (rim) [ppm]"`}},
	{name: "unit of something else in round brackets", text: "distance (yr),Ti [ppm]\n1,50\n", change: func(o *Options) { o.Position, o.Errors = "distance (yr)", Errors{Percent: 4} }, want: []string{
		`ti.csv:1:1: column "distance (yr)": no unit; write, for example, "distance (yr) [um]"`}},
	{name: "two units in round brackets", text: "distance (nm),Ti [ppm]\n1,50\n", change: func(o *Options) { o.Errors = Errors{Percent: 4} }, want: []string{
		`ti.csv:1:1: column "distance (nm)": its unit is nm, but the column asked for is in um; write the same unit in both places`}},
	{name: "unknown unit", text: "distance [um],Ti [ppmm],2se [ppm]\n1,50,2\n", change: func(o *Options) { o.Value = "Ti" }, want: []string{
		`ti.csv:1:15: column "Ti [ppmm]": unknown unit "ppmm"; did you mean ppm? want ppm, wt%, mole fraction, mol%, %, Fo, An or grey`}},
	{name: "two units", text: "distance [nm],Ti [ppm],2se [ppm]\n1,50,2\n", want: []string{
		`ti.csv:1:1: column "distance [nm]": its unit is nm, but the column asked for is in um; write the same unit in both places`}},
	{name: "error in another family", text: "distance [um],Ti [ppm],2se [mole fraction]\n1,50,2\n", change: func(o *Options) { o.Errors.Column = "2se" }, want: []string{
		`ti.csv:1:24: column "2se [mole fraction]": in a unit that the values' unit ppm does not convert to; give errors in the unit of the values`}},
	{name: "constant error in another family", text: header + "1,50,2\n", change: func(o *Options) { o.Errors = Errors{Constant: Amount{1, "%"}} }, want: []string{
		`ti.csv: error "1 %": does not convert to the values' unit ppm; give errors in the unit of the values`}},
	{name: "floor of nothing", text: header + "1,50,2\n", change: func(o *Options) { o.Errors.Floor = Amount{1e-300, "ppm"} }, want: []string{
		`ti.csv: error "1e-300 ppm": too small an error; want what the instrument resolves`}},
	{name: "no errors", text: header + "1,50,2\n", change: func(o *Options) { o.Errors = Errors{} }, want: []string{
		`ti.csv: error: no errors given; want one of "4 %", "1.5 ppm" or { column = "2se [ppm]", sigmas = 2 }`}},
	{name: "errors twice", text: header + "1,50,2\n", change: func(o *Options) { o.Errors.Percent = 4 }, want: []string{
		`ti.csv: error: errors given in more than one way; want one of "4 %", "1.5 ppm" or { column = "2se [ppm]", sigmas = 2 }`}},
	{name: "per cent of what", text: "distance [um],Ti [wt%],err [%]\n0,50,4\n", change: func(o *Options) { o.Value, o.Errors = "Ti", Errors{Column: "err", Sigmas: 1} }, want: []string{
		`ti.csv:1:24: column "err [%]": per cent of each value, or of the whole like the values in wt%; write [% of value] or [wt%]`}},
	{name: "limits that are none", text: header + "1,<0,\n2,<,\n3,<five,\n4,<-1,\n5,< 2e6,\n6,bdl,\n7,<<5,\n", change: func(o *Options) { o.Below = AsLimit }, want: []string{
		`ti.csv:2:3: Ti [ppm] "<0": not a limit between zero and the whole, which is 1e+06 ppm; write the limit of detection, such as "<5"`,
		`ti.csv:3:3: Ti [ppm] "<": blank; write the limit as a number, such as "<5"`,
		`ti.csv:4:3: Ti [ppm] "<five": not a number; write the limit as a number, such as "<5"`,
		`ti.csv:5:3: Ti [ppm] "<-1": not a limit between zero and the whole, which is 1e+06 ppm; write the limit of detection, such as "<5"`,
		`ti.csv:6:3: Ti [ppm] "< 2e6": not a limit between zero and the whole, which is 1e+06 ppm; write the limit of detection, such as "<5"`,
		`ti.csv:7:3: Ti [ppm] "bdl": below a limit that is not given; write the limit, such as "<5", or below = "skip" in the study to leave such rows out`,
		`ti.csv:8:3: Ti [ppm] "<<5": a limit and not a number; write the limit as a number, such as "<5"`}},
	{name: "a comma in limits that may mean thousands", text: strings.ReplaceAll(header, ",", ";") + "1;50;2\n2;<1,250;\n", change: func(o *Options) { o.Below = AsLimit }, want: []string{
		`ti.csv:3:3: Ti [ppm] "<1,250": thousands set off, or a decimal comma; write 1234 or 1.234; nothing else in the file tells which is meant`}},
	{name: "nothing but limits", text: header + "1,<5,\n", change: func(o *Options) { o.Below = AsLimit }, want: []string{
		`ti.csv: no value is left: 0 marked to be left out, 0 outside the window, 1 below detection; want at least one`}},
	{name: "numbers of analyses that are none", text: "distance [um],Ti [ppm],sd [ppm],n\n1,50,2,0\n2,50,2,2.5\n3,50,2,\n", change: func(o *Options) { o.Errors = Errors{Column: "sd [ppm]", Counts: "n"} }, want: []string{
		`ti.csv:2:8: n "0": not a number of analyses; write a whole number of at least 1`,
		`ti.csv:3:8: n "2.5": not a number of analyses; write a whole number of at least 1`,
		`ti.csv:4:8: n: blank; fill it in, or leave the row out`}},
	{name: "numbers of analyses of no column", text: header + "1,50,2\n", change: func(o *Options) { o.Errors = Errors{Percent: 2, Analyses: 3} }, want: []string{
		`ti.csv: error: numbers of analyses without a column of errors, or twice; want one of "4 %", "1.5 ppm" or { column = "2se [ppm]", sigmas = 2 }`}},
	{name: "a tenth of an analysis", text: header + "1,50,2\n", change: func(o *Options) { o.Errors.Analyses = 0.1 }, want: []string{
		`ti.csv: error: errors of 0.1 analyses; want one of "4 %", "1.5 ppm" or { column = "2se [ppm]", sigmas = 2 }`}},
	{name: "three sigmas", text: header + "1,50,2\n", change: func(o *Options) { o.Errors.Sigmas = 3 }, want: []string{
		`ti.csv: error: a column of 3 standard deviations; want one of "4 %", "1.5 ppm" or { column = "2se [ppm]", sigmas = 2 }`}},
	{name: "negative per cent", text: header + "1,50,2\n", change: func(o *Options) { o.Errors = Errors{Percent: -4} }, want: []string{
		`ti.csv: error: errors below zero; want one of "4 %", "1.5 ppm" or { column = "2se [ppm]", sigmas = 2 }`}},
	{name: "column twice", text: "distance [um],Ti [ppm],Ti [ppm],2se [ppm]\n1,50,50,2\n", want: []string{
		`ti.csv:1:24: column "Ti [ppm]": there are two of this name; name it with its unit, or rename one of them`}},
	{name: "every bad cell at once", text: header + ",50,2\n1,nan,2\n2,+Inf,2\n3,abc,2\n4,12 ppm,2\n5,#DIV/0!,2\n6,<5,2\n7,1e999,2\n8,0x1p4,2\n9,1_0,2\n", want: []string{
		`ti.csv:2:1: distance [um]: blank; fill it in, or leave the row out`,
		`ti.csv:3:3: Ti [ppm] "nan": not a finite number; write a number, or leave the row out`,
		`ti.csv:4:3: Ti [ppm] "+Inf": not a finite number; write a number, or leave the row out`,
		`ti.csv:5:3: Ti [ppm] "abc": not a number; write only the number, such as 12.5; its unit belongs in the header`,
		`ti.csv:6:3: Ti [ppm] "12 ppm": not a number; write only the number, such as 12.5; its unit belongs in the header`,
		`ti.csv:7:3: Ti [ppm] "#DIV/0!": an error that a spreadsheet left; mend it in the spreadsheet, or leave the row out`,
		`ti.csv:8:3: Ti [ppm] "<5": below detection, and the study does not say what becomes of it; write below = "limit" in the traverse to use it as a limit, or below = "skip" to leave such rows out`,
		`ti.csv:9:3: Ti [ppm] "1e999": too large for a number; check the exponent`,
		`ti.csv:10:3: Ti [ppm] "0x1p4": not a number; write only the number, such as 12.5; its unit belongs in the header`,
		`ti.csv:11:3: Ti [ppm] "1_0": not a number; write only the number, such as 12.5; its unit belongs in the header`}},
	{name: "spreadsheet error first in its row", text: header + "#N/A,50,2\n", want: []string{
		`ti.csv:2:1: distance [um] "#N/A": an error that a spreadsheet left; mend it in the spreadsheet, or leave the row out`}},
	{name: "repeated position", text: header + "1,50,2\n2,51,2\n1.0,52,2\n", want: []string{
		`ti.csv:4:1: distance [um] "1.0": the same position as on line 2; average the analyses of one place, or leave all but one out`}},
	{name: "unsorted", text: header + "1,50,2\n3,51,2\n2,52,2\n4,52,2\n", want: []string{
		`ti.csv:4:1: distance [um] "2": turns back after line 3; sort the rows by position`}},
	{name: "beyond the rim", text: header + "1,50,2\n30,51,2\n", change: func(o *Options) { o.Zero, o.Size = Rim, 10e-6 }, want: []string{
		`ti.csv:3:1: distance [um] "30": beyond the rim, which is at 10 um from the centre; check the unit, the zero and the widths of the zones, or set a window`}},
	{name: "errors not above zero", text: header + "1,50,0\n2,50,-1\n3,50,1e-12\n", want: []string{
		`ti.csv:2:6: 2se [ppm] "0": an error must be above zero; give a floor for the errors, or leave the row out`,
		`ti.csv:3:6: 2se [ppm] "-1": an error below zero; write the size of the error`,
		`ti.csv:4:6: 2se [ppm] "1e-12": an error must be above zero; give a floor for the errors, or leave the row out`}},
	{name: "per cent of nothing", text: header + "1,0,2\n", change: func(o *Options) { o.Errors = Errors{Percent: 4} }, want: []string{
		`ti.csv:2:3: Ti [ppm] "0": 4 % of it is no error above zero; give a floor for the errors, or leave the row out`}},
	{name: "more than the whole", text: header + "1,5e6,2\n", want: []string{
		`ti.csv:2:3: Ti [ppm] "5e6": more than the whole, which is 1e+06 ppm; check the number and the unit`}},
	{name: "ragged", text: header + "1,50\n2,50,2,7\n", want: []string{
		`ti.csv:2:1: "1,50": 2 cells where the header has 3; give every row one cell a column`,
		`ti.csv:3:1: "2,50,2,7": 4 cells where the header has 3; give every row one cell a column; if the commas are decimal, separate the columns by semicolons or tabs`}},
	{name: "decimal comma between commas", text: header + "1,\"50,5\",2\n", want: []string{
		`ti.csv:2:3: Ti [ppm] "50,5": a comma inside a number, in a table separated by commas; write a decimal point, or separate the columns by semicolons or tabs`}},
	{name: "comma that may mean thousands", text: strings.ReplaceAll(header, ",", ";") + "1;50;2\n2;1,234;2\n3;1,300;2\n", want: []string{
		`ti.csv:3:3: Ti [ppm] "1,234": thousands set off, or a decimal comma; write 1234 or 1.234; nothing else in the file tells which is meant`}},
	{name: "thousands", text: strings.ReplaceAll(header, ",", ";") + "1;1,234.5;2\n2;1,234,567;2\n", want: []string{
		`ti.csv:2:3: Ti [ppm] "1,234.5": thousands are set off; write 1234.5 and not 1,234.5`,
		`ti.csv:3:3: Ti [ppm] "1,234,567": thousands are set off; write 1234.5 and not 1,234.5`}},
	{name: "points and commas", text: strings.ReplaceAll(header, ",", ";") + "1.5;50;2\n2;50,5;2\n", want: []string{
		`ti.csv:3:3: Ti [ppm] "50,5": decimal points and decimal commas in one table; write all numbers with a decimal point`}},
	{name: "open quote", text: header + "1,\"50,2\n", want: []string{
		`ti.csv:2:3: "\"50,2": the quote is not closed on its line; close the quote, and keep each cell on one line`}},
	{name: "text behind a quote", text: header + "1,\"5\"0,2\n", want: []string{
		`ti.csv:2:3: "\"5\"0,2": text behind the closing quote; double a quote that belongs to the cell: ""`}},
	{name: "odd mark", text: "distance [um],Ti [ppm],2se [ppm],skip\n1,50,2,good\n", change: func(o *Options) { o.Skip = "skip" }, want: []string{
		`ti.csv:2:8: skip "good": neither a mark nor none; write "x" to leave the row out, nothing to keep it`}},
	{name: "nothing left", text: "distance [um],Ti [ppm],2se [ppm],skip\n1,50,2,x\n7,50,2,\n", change: func(o *Options) { o.Skip, o.To = "skip", 3e-6 }, want: []string{
		`ti.csv: no value is left: 1 marked to be left out, 1 outside the window, 0 below detection; want at least one`}},
	{name: "long line", text: header + strings.Repeat("1", maxLine+1), want: []string{
		`ti.csv:2:1: a line of more than 1048576 bytes; want one row a line`}},
	{name: "many columns", text: strings.Repeat(",", maxCells+5), want: []string{
		`ti.csv:1:16385: more than 16384 columns; want one row a line`}},
	{name: "long cell", text: header + "1," + strings.Repeat("µ", 100) + ",2\n", want: []string{
		`ti.csv:2:3: Ti [ppm] "` + strings.Repeat("µ", 57) + `...": not a number; write only the number, such as 12.5; its unit belongs in the header`}},
}

func TestReadRefuses(t *testing.T) {
	for _, test := range refusals {
		t.Run(test.name, func(t *testing.T) {
			o := standard()
			if test.change != nil {
				test.change(&o)
			}
			got, err := Read("ti.csv", strings.NewReader(test.text), o)
			if got != nil || err == nil {
				t.Fatalf("got %v, %v, want an error", got, err)
			}
			if diff := cmp.Diff(test.want, strings.Split(err.Error(), "\n")); diff != "" {
				t.Errorf("wanted -, got +:\n%s", diff)
			}
		})
	}
}

// TestReadTellsOnce: what is wrong in a whole column is told once, up to four
// rows one by one.
func TestReadTellsOnce(t *testing.T) {
	rows := func(n int) string {
		text := header + "0,50,2\n"
		for i := range n {
			text += fmt.Sprintf("%d,<%d,2\n", i+1, i+4)
		}
		return text + "90,50,none\n91,<7,2\n"
	}
	const why, remedy = `below detection, and the study does not say what becomes of it`, `write below = "limit" in the traverse to use it as a limit, or below = "skip" to leave such rows out`
	const last = `2se [ppm] "none": not a number; write only the number, such as 12.5; its unit belongs in the header`
	for _, test := range []struct {
		name string
		rows int
		want []string
	}{
		{"few", 2, []string{
			`ti.csv:3:3: Ti [ppm] "<4": ` + why + "; " + remedy,
			`ti.csv:4:3: Ti [ppm] "<5": ` + why + "; " + remedy,
			`ti.csv:5:7: ` + last,
			`ti.csv:6:4: Ti [ppm] "<7": ` + why + "; " + remedy}},
		{"many", 15, []string{
			`ti.csv:3:3: Ti [ppm] "<4": ` + why + ", in 16 rows of lines 3 to 19; " + remedy,
			`ti.csv:18:7: ` + last}},
	} {
		t.Run(test.name, func(t *testing.T) {
			o := standard()
			o.Zero, o.Size = Centre, 1e-3
			_, err := Read("ti.csv", strings.NewReader(rows(test.rows)), o)
			if err == nil {
				t.Fatal("no error")
			}
			if diff := cmp.Diff(test.want, strings.Split(err.Error(), "\n")); diff != "" {
				t.Errorf("wanted -, got +:\n%s", diff)
			}
		})
	}
}

// TestReadStopsAtTwentyProblems: a file may have as many kinds of them as rows.
func TestReadStopsAtTwentyProblems(t *testing.T) {
	text := header
	for i := range 50 {
		text += fmt.Sprintf("%d,50,2\n%[1]d,50,2\n", i)
	}
	_, err := Read("ti.csv", strings.NewReader(text), standard())
	if n := len(strings.Split(err.Error(), "\n")); n != maxProblems {
		t.Errorf("%d problems, want %d", n, maxProblems)
	}
}

// TestReadManyRows: the rows of a wrong file are not gathered without end.
func TestReadManyRows(t *testing.T) {
	var text strings.Builder
	text.WriteString(header)
	for i := range maxRows + 5 {
		fmt.Fprintf(&text, "%d,50,2\n", i)
	}
	_, err := Read("ti.csv", strings.NewReader(text.String()), standard())
	if want := "ti.csv:100002:1: more than 100000 rows; thin the table, or check that it is the right file"; err == nil || err.Error() != want {
		t.Errorf("got %v, want %s", err, want)
	}
}

// TestReadLargeFile: a file over the limit is refused without being read on.
func TestReadLargeFile(t *testing.T) {
	r := &endless{}
	_, err := Read("ti.csv", r, standard())
	if err == nil || err.Error() != "ti.csv: larger than 64 MiB; name the table of the measurements itself" {
		t.Errorf("got %v", err)
	}
	if most := 2 * MaxBytes; r.bytes > most {
		t.Errorf("%d bytes read, want no more than %d", r.bytes, most)
	}
}

type endless struct{ bytes int }

func (e *endless) Read(p []byte) (int, error) {
	for i := range p {
		p[i] = '1'
	}
	e.bytes += len(p)
	return len(p), nil
}

// TestReadFolder: an open folder cannot be read, and the error does not repeat
// the path.
func TestReadFolder(t *testing.T) {
	folder, err := os.Open(t.TempDir())
	if err != nil {
		t.Fatal(err)
	}
	defer folder.Close()
	_, err = Read("data", folder, standard())
	var input *thermal.InputError
	if !errors.As(err, &input) || !strings.HasPrefix(err.Error(), "data: cannot be read: ") || strings.Contains(err.Error(), "/") {
		t.Errorf("got %v", err)
	}
}

func TestReadPanics(t *testing.T) {
	for _, test := range []struct {
		name   string
		change func(o *Options)
	}{
		{"rim without size", func(o *Options) { o.Zero = Rim }},
		{"size that is no number", func(o *Options) { o.Size = math.NaN() }},
		{"window backwards", func(o *Options) { o.From, o.To = 2, 1 }},
		{"window without an end", func(o *Options) { o.To = math.NaN() }},
		{"spot without a width", func(o *Options) { o.Spot.Kind = TopHat }},
		{"unknown zero", func(o *Options) { o.Zero = 5 }},
	} {
		t.Run(test.name, func(t *testing.T) {
			defer func() {
				if s, ok := recover().(string); !ok || !strings.HasPrefix(s, "traverse: ") {
					t.Errorf("panic with %q, want traverse: ...", s)
				}
			}()
			o := standard()
			test.change(&o)
			Read("ti.csv", strings.NewReader(header+"1,2,3\n"), o)
		})
	}
}

func TestReadColumns(t *testing.T) {
	columns := []Column{{"t [yr]", thermal.Duration}, {"T [C]", thermal.Temperature}}
	got, err := ReadColumns("tt.csv", strings.NewReader("T [C];t [kyr]\n700;0\n750;0\n690;2\n"), []Column{{"t", thermal.Duration}, columns[1]})
	want := &Table{Columns: [][]float64{{0, 0, 2e3 * thermal.Year}, {973.15, 1023.15, 963.15}}, Units: []string{"kyr", "C"}, Line: []int{2, 3, 4}}
	if diff := cmp.Diff(want, got, near); err != nil || diff != "" {
		t.Errorf("%v; wanted -, got +:\n%s", err, diff)
	}
	for _, test := range []struct{ name, text, want string }{
		{"too cold", "t [yr],T [C]\n0,-273.15\n", `tt.csv:2:3: T [C] "-273.15": not above absolute zero; check the sign and the unit`},
		{"ages", "t [Ma],T [C]\n0,700\n", `tt.csv:1:1: column "t [Ma]": unit "Ma" stands for an age before present as well as for a duration; write Myr for a duration`},
		{"no rows", "t [yr],T [C]\n", `tt.csv: no rows below the header; want at least one`},
		{"overflow", "t [yr],T [C]\n1e305,700\n", `tt.csv:2:1: t [yr] "1e305": too large for a number; check the exponent and the unit`},
	} {
		t.Run(test.name, func(t *testing.T) {
			got, err := ReadColumns("tt.csv", strings.NewReader(test.text), columns)
			if got != nil || err == nil || err.Error() != test.want {
				t.Errorf("got %v, %v\nwant %s", got, err, test.want)
			}
		})
	}
}

func TestParseSpot(t *testing.T) {
	for _, test := range []struct {
		text string
		want Spot
	}{
		{"0.8 um fwhm", Spot{Gaussian, 0.8e-6 / WidthPerSigma}},
		{"0.8 um FWHM", Spot{Gaussian, 0.8e-6 / WidthPerSigma}},
		{"340 nm sigma", Spot{Gaussian, 0.34e-6}},
		{"15um top-hat", Spot{TopHat, 15e-6}},
		{"point", Spot{}},
	} {
		got, err := ParseSpot(test.text)
		if diff := cmp.Diff(test.want, got, near); err != nil || diff != "" {
			t.Errorf("%s: got %v, %v", test.text, got, err)
		}
	}
	for text, want := range map[string]string{
		"":              `does not say what the width measures`,
		"0.8 um":        `does not say what the width measures`,
		"fwhm":          `does not say what the width measures`,
		"0 um fwhm":     `a width must be above zero`,
		"-1 um top-hat": `a width must be above zero`,
		"2 s sigma":     `is a duration`,
		"nan um sigma":  `nan`,
	} {
		got, err := ParseSpot(text)
		var input *thermal.InputError
		if got != (Spot{}) || !errors.As(err, &input) || !strings.Contains(err.Error(), want) {
			t.Errorf("%q: got %v, %v, want %s", text, got, err, want)
		}
	}
}

func TestParseErrors(t *testing.T) {
	for text, want := range map[string]Errors{
		"4 %":      {Percent: 4},
		"4. %":     {Percent: 4},
		"0.5 mol%": {Constant: Amount{0.5, "mol%"}},
		"2 grey":   {Constant: Amount{2, "grey"}},
		"2.5%":     {Percent: 2.5},
		"1.5 ppm":  {Constant: Amount{1.5, "ppm"}},
		"0.01 wt%": {Constant: Amount{0.01, "wt%"}},
	} {
		if got, err := ParseErrors(text); err != nil || got != want {
			t.Errorf("%q: got %v, %v, want %v", text, got, err, want)
		}
	}
	for _, text := range []string{"", "4", "0 %", "-1 %", "nan %", "inf%", "x %", "0 ppm", "-2 ppm", "3 +- 1 ppm", "2 um"} {
		got, err := ParseErrors(text)
		var input *thermal.InputError
		if got != (Errors{}) || !errors.As(err, &input) {
			t.Errorf("%q: got %v, %v, want an input error", text, got, err)
		}
	}
}
