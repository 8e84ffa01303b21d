package main

import (
	"crypto/sha256"
	"encoding/hex"
	"os"
	"reflect"
	"slices"
	"testing"

	"bankfire/paths/study"
	"bankfire/paths/traverse"
)

func TestPortable(t *testing.T) {
	inputs := []study.Input{{Name: "s.toml"}, {Name: "ti.csv"}, {Name: "../data/sr.csv"}, {Name: "far.csv"}}
	for _, test := range []struct{ name, file, note, want string }{
		{"beside the study", "s.toml", "ti.csv: odd", "ti.csv: odd"},
		{"study elsewhere", "a/s.toml", "a/ti.csv: odd", "ti.csv: odd"},
		{"study anywhere", "/a/s.toml", "/a/ti.csv: odd: very", "ti.csv: odd: very"},
		{"above the study", "/a/b/s.toml", "/a/data/sr.csv: odd", "../data/sr.csv: odd"},
		{"above the study, from it", "s.toml", "../data/sr.csv: odd", "../data/sr.csv: odd"},
		{"file anywhere", "s.toml", "/far/far.csv: odd", "far.csv: odd"},
		{"no file", "a/s.toml", "Ti: no edge given", "Ti: no edge given"},
		{"no colon", "a/s.toml", "odd", "odd"},
	} {
		t.Run(test.name, func(t *testing.T) {
			s := &study.Study{File: test.file, Inputs: inputs, Notes: []string{test.note}}
			if got := portable(s); !slices.Equal(got, []string{test.want}) {
				t.Errorf("got %q, want %q", got, test.want)
			}
		})
	}
}

func TestLawsUsed(t *testing.T) {
	law := func(key, citation string) study.Law { return study.Law{Key: key, Citation: citation} }
	measured := new(traverse.Traverse)
	s := &study.Study{Crystals: []study.Crystal{
		{Name: "A", Elements: []study.Element{
			{Name: "Ti", Law: law("mine", "me"), Traverse: measured}, {Name: "Sr", Law: law("", "one"), Traverse: measured}}},
		{Name: "B", Elements: []study.Element{
			{Name: "Ti", Law: law("mine", "me"), Traverse: measured}, {Name: "Sr", Law: law("", "two"), Traverse: measured},
			{Name: "Al", Law: law("unmeasured", "me")}}},
	}}
	const own = "as given in the study"
	want := []lawUsed{
		{"mine", "me", own, []elementKey{{"A", "Ti"}, {"B", "Ti"}}},
		{"", "one", own, []elementKey{{"A", "Sr"}}},
		{"", "two", own, []elementKey{{"B", "Sr"}}},
	}
	if got := lawsUsed(s); !reflect.DeepEqual(got, want) {
		t.Errorf("got  %+v\nwant %+v", got, want)
	}
}

func TestBuild(t *testing.T) {
	name, err := os.Executable()
	if err != nil {
		t.Skip(err)
	}
	data, err := os.ReadFile(name)
	if err != nil {
		t.Skip(err)
	}
	sum := sha256.Sum256(data)
	if got, want := build(), hex.EncodeToString(sum[:]); got != want {
		t.Errorf("got %q, want %q", got, want)
	}
}
