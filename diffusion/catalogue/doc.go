// Package catalogue holds published diffusion laws of minerals as data: constants, calibrated range, uncertainty,
// tag, citation, and how the constants are known. The table is laws.csv, built into the program; its first lines
// explain the columns. A row becomes a diffusion.Law once the conditions it depends on are known:
//
//	row, err := catalogue.Find("quartz-ti-cherniak2007")
//	law, err := row.Law(nil) // Needs() is empty, so no conditions are asked for
//	d := math.Exp(law.LnD(1023.15))
//
// Beside the laws stand crystal/melt partition relations (FindPartition) and the buffers of oxygen fugacity
// (FindBuffer), along which a law that depends on fO2 stays Arrhenius (Row.LawAlong); and relations for what a mineral
// takes up of an element at saturation (FindSolubility).
//
// To add a law, add a row to laws.csv in the order of the keys; a test walks the table. Laws whose constants could
// not be found, silicate melts (not minerals) and metals (test material) are not in it.
package catalogue
