package analysis

// undecidedByLaue withdraws what answers say when the intensities do not have the Laue
// class of the group: means over reflections that are not equivalent answer nothing. The last
// answer, of what else could have done it, stands.
func undecidedByLaue(r *Result, list []Answer) []Answer {
	if !laueFailsIn(r.Ledger) {
		return list
	}
	for k := range list[:len(list)-1] {
		list[k].Verdict = VerdictUnsure
		list[k].Text = "The space group makes reflections equivalent that are not (see \"" + checkLaue + "\" in the ledger): what follows is of means of unlike ones. " + list[k].Text
	}
	return list
}

func laueFailsIn(ledger []LedgerEntry) bool {
	for _, e := range ledger {
		if e.Check == checkLaue && e.Verdict == VerdictFails {
			return true
		}
	}
	return false
}
