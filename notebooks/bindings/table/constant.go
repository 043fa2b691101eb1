package table

import (
	"fmt"
	"go/constant"
	"go/types"
	"math/big"
	"strconv"
)

// untypedText is how the interpreter's tables write an untyped constant without
// loss; empty for kinds they do not know. Integers beyond every machine type are
// written as floats, since the interpreter turns them into 0 otherwise.
func untypedText(kind types.BasicKind, v constant.Value) string {
	switch kind {
	case types.UntypedBool:
		return fmt.Sprintf("bool:%v", constant.BoolVal(v))
	case types.UntypedInt:
		if text := constant.ToInt(v).ExactString(); isMachineInt(text) {
			return "int:" + text
		}
		return "float:" + constant.ToFloat(v).ExactString()
	case types.UntypedRune:
		return "rune:" + constant.ToInt(v).ExactString()
	case types.UntypedFloat:
		return "float:" + constant.ToFloat(v).ExactString()
	case types.UntypedComplex:
		c := constant.ToComplex(v)
		return "complex:" + constant.Real(c).ExactString() + ":" + constant.Imag(c).ExactString()
	case types.UntypedString:
		return "string:" + constant.StringVal(v)
	}
	return ""
}

func isMachineInt(text string) bool {
	n, ok := new(big.Int).SetString(text, 10)
	return ok && (n.IsInt64() || n.IsUint64())
}

// machineValue is an expression of a machine type for an untyped constant:
// integers get the narrowest of int, int64 and uint64 that holds them on every
// machine, and those that none holds the nearest float64.
func machineValue(kind types.BasicKind, v constant.Value, ref string) string {
	switch kind {
	case types.UntypedInt:
		n, _ := new(big.Int).SetString(constant.ToInt(v).ExactString(), 10)
		switch {
		case n.IsInt64() && int64(int32(n.Int64())) == n.Int64():
			return ref
		case n.IsInt64():
			return "int64(" + ref + ")"
		case n.IsUint64():
			return "uint64(" + ref + ")"
		}
		f, _ := constant.Float64Val(constant.ToFloat(v))
		return "float64(" + strconv.FormatFloat(f, 'g', -1, 64) + ")"
	case types.UntypedFloat:
		f, _ := constant.Float64Val(constant.ToFloat(v))
		if f == 0 && constant.Sign(v) != 0 {
			// Smaller than every float64: the conversion would not compile.
			return "float64(0)"
		}
	}
	return ref
}
