package main

import (
	"crypto/sha256"
	"encoding/hex"
	"io"
	"os"

	"bankfire/cmd/bankfire/internal/results"
)

// thisProgram identifies the program that is running.
func thisProgram() program {
	return program{Name: results.Program, Version: version(), Build: build()}
}

// build returns the SHA-256 of the executable in hexadecimal, or "unknown" if
// the system does not let a program read itself.
func build() string {
	name, err := os.Executable()
	if err != nil {
		return "unknown"
	}
	f, err := os.Open(name)
	if err != nil {
		return "unknown"
	}
	defer f.Close()
	sum := sha256.New()
	if _, err := io.Copy(sum, f); err != nil {
		return "unknown"
	}
	return hex.EncodeToString(sum.Sum(nil))
}
