package session

import (
	_ "embed"
	"fmt"
	"os"
	"strings"
	"sync/atomic"
)

//go:embed jupyter.css
var jupyterStyle string

// shown counts views, so that the buttons of two outputs on one page do not make
// one group.
var shown atomic.Int64

// styled brings a view's style with it where the front end is not our page, which
// has one of its own: in Jupyter an output stands among foreign rules, and the
// choices of a figure would stay hidden.
func styled(html string) string {
	if os.Getenv(RunnerEnv) != "" {
		return html
	}
	html = strings.ReplaceAll(html, `name="pick-`, fmt.Sprintf(`name="pick-%d-`, shown.Add(1)))
	return `<style>` + jupyterStyle + `</style><div class="thinward">` + html + `</div>`
}
