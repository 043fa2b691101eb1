package bindings

func Bound() []string { return nil }

func Holds(path string) bool { return true }
