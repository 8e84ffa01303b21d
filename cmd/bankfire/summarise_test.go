package main

import (
	"crypto/sha256"
	"encoding/hex"
	"os"
	"reflect"
	"testing"

	"bankfire/paths/study"
	"bankfire/paths/traverse"
)

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
