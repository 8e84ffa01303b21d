// Package figure draws the picture of a weighed profile: the measured
// traverse with its start and the modelled profile of every path, the duration
// curves, and below them a row a path with its residuals and its verdict in words;
// and that of a family of paths, a [Family] for [DrawFamily].
//
// Fill a [Weighing] with plain data in SI units and call [Draw]:
//
//	f := figure.Weighing{Title: "Harrow Fell", Subject: "Ti in quartz HF-12", Quantity: "Ti", Unit: "ppm"}
//	f.Points = append(f.Points, figure.Point{At: 150e-6, Value: 92, Sigma: 2})
//	err := figure.Draw(file, &f)
//
// The panels are laid out as a list of marks in printer's points; only the
// painter, which turns marks into pixels, and the fonts know a graphics library.
package figure
