package main

import "regexp"

// hallSymbol is a Hall symbol of a centrosymmetric group, which begins like a
// flag.
var hallSymbol = regexp.MustCompile(`^-[PABCIRSTFH]( .*)?$`)

// shieldHall moves such symbols behind "--", so that they are read as arguments.
func shieldHall(args []string) []string {
	var flags, symbols []string
	for i, a := range args {
		if a == "--" {
			return append(append(flags, "--"), append(symbols, args[i+1:]...)...)
		}
		if hallSymbol.MatchString(a) {
			symbols = append(symbols, a)
		} else {
			flags = append(flags, a)
		}
	}
	if symbols == nil {
		return args
	}
	return append(append(flags, "--"), symbols...)
}
