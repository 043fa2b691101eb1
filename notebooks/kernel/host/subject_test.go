package host

import (
	"strings"
	"testing"
)

func TestSubject(t *testing.T) {
	for _, c := range []struct{ code, want string }{
		{"session.Op|en", "session.Open"},
		{"ses|sion.Open", "session"},
		{"|session", "session"},
		{"x := s.Study().Fi|nd(1)", "s.Study().Find"},
		{"f(g(1), h(2)).A[3].B|", "f(g(1), h(2)).A[3].B"},
		{"session.Open(|", "session.Open"},
		{"session.Open(\"a\", 3 + |", "session.Open"},
		{"session.Open(\"a|\")", "session.Open"},
		{"f(g(1), |", "f"},
		{"f([]int{1, |", ""},
		{"f(1) + |2", ""},
		{"for i := 0; i < n; |", ""},
		{"func() { s.A(|", "s.A"},
		{"(x).Y|", "Y"},
		{"1 + |", ""},
		{"|", ""},
		{"\"s.A|\"", ""},
		{"// s.A|", ""},
		{"s.|", ""},
		{"ä.Ö|", "ä.Ö"},
	} {
		at := strings.IndexByte(c.code, '|')
		if got := Subject(strings.Replace(c.code, "|", "", 1), at); got != c.want {
			t.Errorf("%s: %q, want %q", c.code, got, c.want)
		}
	}
}

func FuzzSubject(f *testing.F) {
	f.Add("x := s.Study().Find(1)", 14)
	f.Add("f(g[1].h(\"", 9)
	f.Fuzz(func(t *testing.T, code string, at int) {
		if got := Subject(code, at); !strings.Contains(code, got) {
			t.Errorf("%q is no part of %q", got, code)
		}
	})
}
