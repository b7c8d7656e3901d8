"""The parts of the kind "local spectral", from the rules of the trial to a sum over its eigenvalues."""
