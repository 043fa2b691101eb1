package main

import (
	"bytes"
	"io"
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"testing"

	"github.com/spf13/cobra"
)

// words splits a command line as a shell does, as far as examples go: quotes, and
// an end at a redirection or a comment.
var words = regexp.MustCompile(`"[^"]*"|\S+`)

func argsOf(line string) []string {
	var out []string
	for _, w := range words.FindAllString(line, -1) {
		if w == ">" || w == "|" || strings.HasPrefix(w, "#") {
			break
		}
		out = append(out, strings.Trim(w, `"`))
	}
	return out
}

// understood has the verbs' own parsers judge a command line without running it.
func understood(t *testing.T, where, line string) {
	t.Helper()
	root := (&app{out: io.Discard, err: io.Discard}).root()
	root.InitDefaultCompletionCmd()
	args := argsOf(line)
	if len(args) == 0 || args[0] != "thinward" {
		t.Errorf("%s: %q is no call of thinward", where, line)
		return
	}
	c, rest, err := root.Find(shieldHall(args[1:]))
	if err != nil || c == root && len(rest) > 0 && !strings.HasPrefix(rest[0], "--") {
		t.Errorf("%s: %q: no such verb (%v)", where, line, err)
		return
	}
	c.InitDefaultHelpFlag()
	c.InitDefaultVersionFlag()
	if err := c.ParseFlags(rest); err != nil {
		t.Errorf("%s: %q: %v", where, line, err)
		return
	}
	if help, err := c.Flags().GetBool("help"); err == nil && help {
		return
	}
	if c.Args != nil && c != root {
		if err := c.Args(c, c.Flags().Args()); err != nil {
			t.Errorf("%s: %q: %v", where, line, err)
		}
	}
}

// TestHelp: every verb says what it does, with examples that the verb understands.
func TestHelp(t *testing.T) {
	var verbs func(c *cobra.Command)
	n := 0
	verbs = func(c *cobra.Command) {
		n++
		if c.Short == "" || c.Example == "" {
			t.Errorf("%s has no short text or no example", c.CommandPath())
		}
		for _, line := range strings.Split(c.Example, "\n") {
			if strings.TrimSpace(line) == "" || !strings.HasPrefix(line, "  ") {
				t.Errorf("%s: the example %q is not indented by two", c.CommandPath(), line)
			}
			if line = strings.TrimSpace(line); strings.HasPrefix(line, "thinward") {
				understood(t, c.CommandPath(), line)
			}
		}
		for _, below := range c.Commands() {
			verbs(below)
		}
	}
	verbs((&app{}).root())
	if n < 16 {
		t.Errorf("only %d verbs", n)
	}
}

// inReadme finds calls of the command in code blocks and in code within a line.
var inReadme = regexp.MustCompile("(?m)(?:^|`)(?:go run ./notebooks/)?(thinward [a-z][^`\n]*)")

func TestReadmeCommands(t *testing.T) {
	text, err := os.ReadFile(filepath.Join("..", "..", "README.md"))
	if err != nil {
		t.Fatal(err)
	}
	if lines := bytes.Count(text, []byte("\n")); lines >= 200 {
		t.Errorf("the README has %d lines", lines)
	}
	found := inReadme.FindAllStringSubmatch(string(text), -1)
	for _, m := range found {
		understood(t, "README.md", m[1])
	}
	if len(found) < 15 {
		t.Errorf("only %d calls were found", len(found))
	}
}

func TestVersionAndCompletion(t *testing.T) {
	for _, c := range []struct {
		args []string
		want string
	}{
		{[]string{"--version"}, "thinward version 0."},
		{[]string{"completion", "bash"}, "bash completion"},
		{[]string{"completion", "zsh"}, "#compdef thinward"},
		{[]string{"completion", "fish"}, "complete -c thinward"},
		{[]string{"__complete", "exa"}, "examine\t"},
		{[]string{"help", "again"}, "thinward again out --json"},
	} {
		var out, errs strings.Builder
		if status := run(c.args, &out, &errs); status != exitDone || !strings.Contains(out.String(), c.want) {
			t.Errorf("%q: status %d, %q is not in\n%s%s", c.args, status, c.want, out.String(), errs.String())
		}
	}
}
