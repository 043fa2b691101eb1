package bindings

func Bound() []string { return nil }
