"""The local spectral program: eigenvalues and whole-number walk counts of one plan, held together."""
