package session

import (
	"fmt"
	"strings"
	"testing"
)

// TestStyleGoesWhereThereIsNone: under our runner a view is bare, elsewhere it
// carries its style, every choice can be shown, and two outputs do not share
// buttons.
func TestStyleGoesWhereThereIsNone(t *testing.T) {
	v := &View{HTML: `<input name="pick-7" data-pick="1">`, Plain: "p"}
	t.Setenv(RunnerEnv, "1")
	if got := v.SimpleRender()["text/html"]; got != v.HTML {
		t.Errorf("under the runner: %v", got)
	}
	t.Setenv(RunnerEnv, "")
	a, b := v.SimpleRender()["text/html"].(string), v.SimpleRender()["text/html"].(string)
	if a == b || !strings.HasPrefix(a, "<style>") || !strings.Contains(a, `<div class="thinward"><input name="pick-`) {
		t.Errorf("elsewhere: %s\n%s", a, b)
	}
	for i := 1; i <= choices; i++ {
		if rule := fmt.Sprintf(`[data-pick="%d"]:checked) .choice[data-choice="%d"]`, i, i); !strings.Contains(jupyterStyle, rule) {
			t.Errorf("no rule shows choice %d", i)
		}
	}
	if strings.Contains(jupyterStyle, "<") {
		t.Error("the style holds a mark that would end it")
	}
}
