package tests

import (
	"bytes"
	"context"
	"flag"
	"image/png"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"github.com/chromedp/chromedp"
)

var pictures = flag.String("pictures", "", "a report.html of the demonstration, of which the pictures of the README are taken")

// shots are the pictures of the README: a part of the report, in a window of that
// size.
var shots = []struct {
	name, part    string
	width, height int64
}{
	{"answer.png", "#answer", 1000, 485},
	{"strength.png", "#strength figure", 810, 500},
	{"ghost.png", "#strength figure:nth-of-type(3)", 810, 525},
}

// TestPictures looks whether the README's pictures are there and small; with
// -pictures=out/report.html it takes them anew.
func TestPictures(t *testing.T) {
	dir := filepath.Join(root, "notebooks", "pictures")
	if *pictures != "" {
		takePictures(t, dir)
	}
	readme, err := os.ReadFile(filepath.Join(root, "README.md"))
	if err != nil {
		t.Fatal(err)
	}
	total := 0
	for _, s := range shots {
		data, err := os.ReadFile(filepath.Join(dir, s.name))
		if err != nil {
			t.Error(err)
			continue
		}
		if _, err := png.DecodeConfig(bytes.NewReader(data)); err != nil {
			t.Errorf("%s: %v", s.name, err)
		}
		total += len(data)
		if !strings.Contains(string(readme), "](notebooks/pictures/"+s.name+")") {
			t.Errorf("the README does not show %s", s.name)
		}
	}
	if total > 300_000 {
		t.Errorf("the pictures take %d bytes", total)
	}
}

func takePictures(t *testing.T, dir string) {
	t.Helper()
	chromium, err := browserPath()
	if err != nil {
		t.Fatal(err)
	}
	page, err := filepath.Abs(*pictures)
	if err != nil {
		t.Fatal(err)
	}
	if err := os.MkdirAll(dir, 0o755); err != nil {
		t.Fatal(err)
	}
	ctx, stop := chromedp.NewExecAllocator(context.Background(), append(chromedp.DefaultExecAllocatorOptions[:], chromedp.ExecPath(chromium), chromedp.NoSandbox,
		chromedp.DisableGPU, chromedp.Flag("disable-background-networking", true), chromedp.UserDataDir(t.TempDir()))...)
	defer stop()
	ctx, stop = chromedp.NewContext(ctx)
	defer stop()
	ctx, stop = context.WithTimeout(ctx, 3*time.Minute)
	defer stop()
	for _, s := range shots {
		if err := chromedp.Do(ctx, chromedp.EmulateViewport(s.width, s.height), chromedp.Navigate("file://"+filepath.ToSlash(page)),
			// The part alone, so that what floats above it is not in the picture.
			script("const x = document.querySelector("+quote(s.part)+"); document.body.replaceChildren(x); document.body.style.padding = '0 10px'; document.documentElement.style.scrollPaddingTop = 0; window.scrollTo(0, 0)")); err != nil {
			t.Fatalf("%s: %v", s.name, err)
		}
		shot, err := chromedp.Run(ctx, chromedp.CaptureScreenshot())
		if err != nil {
			t.Fatalf("%s: %v", s.name, err)
		}
		if err := os.WriteFile(filepath.Join(dir, s.name), shot, 0o644); err != nil {
			t.Fatal(err)
		}
	}
}
