package main

import (
	"testing"

	"github.com/google/go-cmp/cmp"
)

func TestShieldHall(t *testing.T) {
	for _, c := range []struct{ in, want []string }{
		{nil, nil},
		{[]string{"group", "P 21 21 21", "--json"}, []string{"group", "P 21 21 21", "--json"}},
		{[]string{"group", "-P 2yn", "--json"}, []string{"group", "--json", "--", "-P 2yn"}},
		{[]string{"group", "-q", "--", "-P 1"}, []string{"group", "-q", "--", "-P 1"}},
		{[]string{"group", "-P", "-q", "--", "x"}, []string{"group", "-q", "--", "-P", "x"}},
		{[]string{"group", "-Px"}, []string{"group", "-Px"}},
	} {
		if diff := cmp.Diff(c.want, shieldHall(c.in)); diff != "" {
			t.Errorf("%q (-want +got):\n%s", c.in, diff)
		}
	}
}
