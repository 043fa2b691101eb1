// Package notebooks holds the committed notebooks, without outputs, so that an
// installed command has them with it.
package notebooks

import "embed"

//go:embed *.ipynb
var Files embed.FS
