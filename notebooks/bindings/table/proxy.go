package table

import (
	"fmt"
	"go/types"
	"strings"
)

// whyNoProxy says why an interpreted type cannot be made to implement an
// interface; empty if it can.
func whyNoProxy(it *types.Interface) string {
	for m := range it.Methods() {
		if !m.Exported() {
			return "unexported method " + m.Name()
		}
		if why := unnameable(m.Signature(), map[types.Type]bool{}); why != "" {
			return "method " + m.Name() + " uses " + why
		}
	}
	return ""
}

// unnameable finds what in a type another package cannot write down: an
// unexported or internal type.
func unnameable(t types.Type, seen map[types.Type]bool) string {
	if seen[t] {
		return ""
	}
	seen[t] = true
	each := func(parts ...types.Type) string {
		for _, p := range parts {
			if why := unnameable(p, seen); why != "" {
				return why
			}
		}
		return ""
	}
	switch t := t.(type) {
	case *types.Alias:
		return each(types.Unalias(t))
	case *types.Named:
		name := t.Obj()
		if name.Pkg() == nil {
			return ""
		}
		if !name.Exported() {
			return "unexported " + name.Name()
		}
		if strings.Contains("/"+name.Pkg().Path()+"/", "/internal/") {
			return "internal " + name.Pkg().Path()
		}
		for arg := range t.TypeArgs().Types() {
			if why := each(arg); why != "" {
				return why
			}
		}
	case *types.Map:
		return each(t.Key(), t.Elem())
	case interface{ Elem() types.Type }: // pointer, slice, array, channel
		return each(t.Elem())
	case *types.Signature:
		return each(t.Params(), t.Results())
	case *types.Tuple:
		for v := range t.Variables() {
			if why := each(v.Type()); why != "" {
				return why
			}
		}
	case *types.Struct:
		for f := range t.Fields() {
			if !f.Exported() {
				return "a struct with unexported fields"
			}
			if why := each(f.Type()); why != "" {
				return why
			}
		}
	}
	return ""
}

// proxy writes a type through which interpreted types implement an interface, in
// the form the interpreter wants: Object holds the interpreted value, and the
// field M_ the function for method M.
func (w *writer) proxy(name string, it *types.Interface) {
	b := &w.proxies
	fmt.Fprintf(b, "\ntype %s struct {\n\tObject interface{}\n", name)
	for m := range it.Methods() {
		fmt.Fprintf(b, "\t%s_ func(%s) %s\n", m.Name(), strings.Join(append([]string{"object interface{}"}, w.params(m.Signature())...), ", "), w.results(m.Signature()))
	}
	fmt.Fprint(b, "}\n")
	for m := range it.Methods() {
		sig := m.Signature()
		args := []string{"p.Object"}
		for i := range sig.Params().Len() {
			a := fmt.Sprintf("a%d", i)
			if sig.Variadic() && i == sig.Params().Len()-1 {
				a += "..."
			}
			args = append(args, a)
		}
		ret := ""
		if sig.Results().Len() > 0 {
			ret = "return "
		}
		fmt.Fprintf(b, "\nfunc (p *%s) %s(%s) %s { %sp.%s_(%s) }\n", name, m.Name(), strings.Join(w.params(sig), ", "), w.results(sig), ret, m.Name(), strings.Join(args, ", "))
	}
}

func (w *writer) params(sig *types.Signature) []string {
	var out []string
	for i := range sig.Params().Len() {
		t := sig.Params().At(i).Type()
		text := types.TypeString(t, w.qualify)
		if s, ok := t.(*types.Slice); ok && sig.Variadic() && i == sig.Params().Len()-1 {
			text = "..." + types.TypeString(s.Elem(), w.qualify)
		}
		out = append(out, fmt.Sprintf("a%d %s", i, text))
	}
	return out
}

func (w *writer) results(sig *types.Signature) string {
	var out []string
	for v := range sig.Results().Variables() {
		out = append(out, types.TypeString(v.Type(), w.qualify))
	}
	return "(" + strings.Join(out, ", ") + ")"
}
