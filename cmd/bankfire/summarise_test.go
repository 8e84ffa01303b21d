package main

import (
	"crypto/sha256"
	"encoding/hex"
	"os"
	"reflect"
	"strings"
	"testing"

	"bankfire/diffusion/catalogue"
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

// A law by direction says of each of its laws how sure it is, and check what the
// share of each is.
func TestLawByDirection(t *testing.T) {
	row, err := catalogue.Find("olivine-ca-coogan2005-a")
	if err != nil {
		t.Fatal(err)
	}
	law := study.Law{Key: row.Key + " + mine", Parts: []study.Part{
		{Axes: "a and b", Share: 0.25, Law: study.Law{Key: row.Key, Row: row}},
		{Axes: "c", Share: 0.75000000001, Law: study.Law{Key: "mine", Caution: "no crystal has it"}},
	}}
	if got, want := confidence(&law), row.Key+": "+row.Confidence+"; mine: as given in the study: no crystal has it"; got != want {
		t.Errorf("confidence %q, want %q", got, want)
	}
	if got, want := lawText(&law), "0.25 of that along a and b, "+row.Key+", "+row.Citation+" + 0.75 of that along c, mine; "; !strings.HasPrefix(got, want) {
		t.Errorf("law %q, want %q", got, want)
	}
}

func TestPartitionsUsed(t *testing.T) {
	row, err := catalogue.FindPartition("sr-bindeman1998")
	if err != nil {
		t.Fatal(err)
	}
	measured := new(traverse.Traverse)
	published, own := &study.Partition{Key: row.Key, Row: row}, &study.Partition{Key: "kx"}
	s := &study.Study{Crystals: []study.Crystal{
		{Name: "A", Elements: []study.Element{
			{Name: "Sr", Partition: published, Traverse: measured}, {Name: "Ti", Traverse: measured}, {Name: "Ba", Partition: own}}},
		{Name: "B", Elements: []study.Element{
			{Name: "Sr", Partition: published, Traverse: measured}, {Name: "Ba", Partition: own, Traverse: measured}}},
	}}
	want := []lawUsed{
		{row.Key, row.Citation, row.Confidence, []elementKey{{"A", "Sr"}, {"B", "Sr"}}},
		{"kx", "", "as given in the study", []elementKey{{"B", "Ba"}}},
	}
	if got := partitionsUsed(s); !reflect.DeepEqual(got, want) {
		t.Errorf("got  %+v\nwant %+v", got, want)
	}
}

func TestConditionsUsed(t *testing.T) {
	buffer, _ := catalogue.FindBuffer("QFM")
	qfm := study.Conditions{Typed: []string{"fO2 QFM"}, Buffer: buffer}
	for _, test := range []struct {
		of   study.Study
		want []string
	}{
		{study.Study{}, []string{}},
		{study.Study{Conditions: qfm}, []string{"fO2 QFM", "QFM: " + buffer.Citation + " (memory: strong)"}},
		{study.Study{Settings: []study.Setting{{Conditions: qfm, Legs: 3, First: `leg "wake"`}}},
			[]string{`leg "wake" and 2 more: fO2 QFM`, "QFM: " + buffer.Citation + " (memory: strong)"}},
	} {
		if got := conditionsUsed(&test.of); !reflect.DeepEqual(got, test.want) {
			t.Errorf("got %q, want %q", got, test.want)
		}
	}
}

// Where every path is barred no profile has a best fit, and so no numbers of one.
func TestOwnBestOfNoPath(t *testing.T) {
	r := smallResult(t)
	if own := ownBests(r)[0]; own.Path == "" || own.Misfit == nil || own.Tail == nil || own.Runs == nil {
		t.Errorf("a path was run: %+v", own)
	}
	notRun(r)
	if own := ownBests(r)[0]; own.Path != "" || own.ShiftFactor != nil || own.Misfit != nil || own.Tail != nil || own.Runs != nil {
		t.Errorf("no path was run: %+v", own)
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
