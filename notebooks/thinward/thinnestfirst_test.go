package main

import (
	"errors"
	"strings"
	"testing"

	"thinward/io/manifest"
)

func TestThinnestFirst(t *testing.T) {
	place := func(name string, nm float64) manifest.Position {
		return manifest.Position{Name: name, ThicknessNM: nm}
	}
	f := &manifest.File{Crystal: []manifest.Crystal{
		{Name: "L1", Position: []manifest.Position{place("thick", 310), place("thin", 140), place("mid", 220)}},
		{Name: "L2", Position: []manifest.Position{place("thin", 140), place("mid", 220), place("thick", 310)}},
		{Name: "L3", Position: []manifest.Position{place("thin", 1384), place("thick", 138.4)}},
	}}
	want := "L1, L2: thinnest first: thin 140 nm, mid 220 nm, thick 310 nm\nL3: thinnest first: thick 138.4 nm, thin 1384 nm\n"
	if got := thinnestFirst(f); got != want {
		t.Errorf("%s\nwant\n%s", got, want)
	}
}

func TestCheckSet(t *testing.T) {
	for _, axis := range []string{"", "crystals", "inverse-variance"} {
		if err := checkSet(map[string]string{"axis": axis, "seed": "3"}); err != nil {
			t.Errorf("%q: %v", axis, err)
		}
	}
	err := checkSet(map[string]string{"axis": "foo"})
	var usage usageError
	if !errors.As(err, &usage) || !strings.HasPrefix(err.Error(), `--set axis "foo" is not known: use crystals`) {
		t.Errorf("%v", err)
	}
}
