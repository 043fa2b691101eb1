//go:build kernel

package main

import (
	"fmt"
	"go/ast"
	"go/token"
	"os"
	"os/signal"
	"regexp"
	"runtime/debug"
	"strconv"
	"strings"
	"sync/atomic"

	"github.com/cosmos72/gomacro/base"
	"github.com/cosmos72/gomacro/base/output"
	interp "github.com/cosmos72/gomacro/fast"
	"github.com/cosmos72/gomacro/imports"
	"github.com/cosmos72/gomacro/xreflect"

	"thinward/notebooks/bindings"
	"thinward/notebooks/kernel/host"
	"thinward/notebooks/session"
)

var (
	interpreter *interp.Interp
	cellRuns    atomic.Bool // an interrupt between cells must not hit the next one
	interrupted atomic.Bool // since the interpreter last cleared its flag
)

// newInterp stands in for interp.New: imports of modules are off, and an
// interrupt stops the cell instead of the process.
func newInterp() *interp.Interp {
	bindings.DropWrappers()
	ir := interp.New()
	ir.Comp.CompGlobals.Options &^= base.OptModuleImport
	interpreter = ir
	signals := make(chan os.Signal, 1)
	signal.Notify(signals, os.Interrupt)
	go func() {
		for range signals {
			interruptCell()
		}
	}()
	return ir
}

func interruptCell() {
	if !cellRuns.Load() {
		return
	}
	interrupted.Store(true)
	session.Interrupt()
	interpreter.Interrupt(os.Interrupt)
}

// runCell stands in for doEval: the front end is connected, the context fresh,
// and interrupts are let through, for the length of the cell.
func runCell(ir *interp.Interp, outerr OutErr, code string, receipt *msgReceipt) ([]interface{}, []xreflect.Type, error) {
	forgetInterrupt(ir)
	session.Renew()
	session.ConnectDisplay(func(data map[string]interface{}) error {
		return receipt.PublishDisplayData(Data{Data: data})
	})
	cellRuns.Store(true)
	defer func() {
		cellRuns.Store(false)
		session.ConnectDisplay(nil)
	}()
	return doEval(ir, outerr, code)
}

// forgetInterrupt lets the interpreter consume an interrupt that came when the
// last cell was already over; otherwise it would end the next one.
func forgetInterrupt(ir *interp.Interp) {
	if !interrupted.Swap(false) {
		return
	}
	defer func() { _ = recover() }()
	ir.RunExpr(ir.Compile("func() int { return 0 }()"))
}

// asFailure stands in for the conversion of a recovered value to an error.
func asFailure(recovered interface{}) (error, bool) {
	_, refused := recovered.(output.RuntimeError)
	f := host.Describe(recovered, debug.Stack(), refused)
	if better := wrongMember(f.Value); better != "" {
		f.Value, f.Traceback = better, []string{f.Name + ": " + better}
	}
	return f, true
}

var notPackage = regexp.MustCompile(`not a package: "([^"]+)" in ([^ .]+)\.([^ ]+)`)

// wrongMember says what a variable has when a cell asked it for something else.
func wrongMember(text string) string {
	m := notPackage.FindStringSubmatch(text)
	if m == nil || m[1] != m[2] {
		return ""
	}
	sym := interpreter.Comp.TryResolve(m[1])
	if sym == nil || sym.Type == nil {
		return ""
	}
	var members []string
	rt := sym.Type.ReflectType()
	for i := 0; i < rt.NumMethod(); i++ {
		members = append(members, rt.Method(i).Name)
	}
	if rt.Kind().String() == "ptr" {
		rt = rt.Elem()
	}
	if rt.Kind().String() == "struct" {
		for i := 0; i < rt.NumField(); i++ {
			if rt.Field(i).IsExported() {
				members = append(members, rt.Field(i).Name)
			}
		}
	}
	return host.Members(m[1], sym.Type.String(), m[3], members)
}

// refuseUnknownImports ends the cell before the interpreter looks for a package
// it does not hold, which would start the Go tool.
func refuseUnknownImports(nodes []ast.Node) {
	for _, n := range nodes {
		decl, ok := n.(*ast.GenDecl)
		if !ok || decl.Tok != token.IMPORT {
			continue
		}
		for _, s := range decl.Specs {
			spec, ok := s.(*ast.ImportSpec)
			if !ok {
				continue
			}
			path, err := strconv.Unquote(spec.Path.Value)
			if err != nil {
				continue
			}
			_, held := imports.Packages[path]
			if !held && interpreter.Comp.CompGlobals.KnownImports[path] == nil {
				panic(&host.CodeFault{Text: host.UnknownImport(path, bindings.Bound())})
			}
		}
	}
}

// copyText stands in for io.Copy from the pipe that catches printed text.
func copyText(w *JupyterStreamWriter, r *os.File) {
	_ = host.CopyText(func(s string) error {
		_, err := w.Write([]byte(s))
		return err
	}, r)
	r.Close()
}

// safeRender stands in for the rendering of a cell's last value: a method that
// panics costs the value and not the kernel.
func (kernel *Kernel) safeRender(vals []interface{}, types []xreflect.Type) (d Data) {
	defer func() {
		if r := recover(); r != nil {
			d = MakeData(MIMETypeText, fmt.Sprint("cannot show this value: ", r))
		}
	}()
	d = kernel.autoRenderResults(vals, types)
	if len(d.Data) > 0 && d.Data[MIMETypeText] == nil {
		d.Data[MIMETypeText] = plainText(vals)
	}
	return d
}

// plainText is what front ends without pictures show of a value that says
// nothing in plain text: its String method, else its type.
func plainText(vals []interface{}) string {
	var parts []string
	for _, v := range vals {
		switch v := v.(type) {
		case nil:
		case fmt.Stringer:
			parts = append(parts, v.String())
		default:
			parts = append(parts, fmt.Sprintf("(%T)", v))
		}
	}
	return strings.Join(parts, " ")
}
