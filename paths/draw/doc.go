// Package draw spreads points over the unit cube. Point i is a function of the
// method, the seed and i alone, so that any part of a set can be drawn anywhere
// and again. Start with New.
package draw
