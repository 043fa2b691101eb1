package simulate

import (
	"context"

	"thinward/analysis/crystal"
	"thinward/analysis/electron"
)

// KinematicIntensities returns |F|^2 of every index in square angstrom, F from
// electron.StructureFactors. Atoms on special positions count once for every
// operator. No atoms give zeros. It returns an error for an unknown element or when ctx ends.
func KinematicIntensities(ctx context.Context, cell crystal.Cell, group *crystal.Group, atoms []Atom, hkl []crystal.HKL) ([]float64, error) {
	f, err := electron.StructureFactors(ctx, &electron.Structure{Cell: cell, Group: group, Atoms: electronAtoms(atoms)}, hkl)
	if err != nil {
		return nil, err
	}
	out := make([]float64, len(f))
	for i, v := range f {
		out[i] = float64(real(v)*real(v)) + float64(imag(v)*imag(v))
	}
	return out, nil
}

func electronAtoms(atoms []Atom) []electron.Atom {
	out := make([]electron.Atom, len(atoms))
	for i, a := range atoms {
		out[i] = electron.Atom(a)
	}
	return out
}
