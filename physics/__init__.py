"""The science of the ledger: spectra, the detailed-balance limit, the diode, and where the watts go.

Arrays in, arrays out: every public function takes scalars or arrays of any mutually broadcastable shapes and works
on all cells at once. An impossible value gives NaN for that cell and leaves the others alone; a caller who wants a
sentence about it asks `physics.checks`. Unless a docstring says otherwise: gaps in eV, voltages in V, current
densities in mA cm⁻², powers in mW cm⁻², temperatures in K, fill factors and efficiencies as fractions.
"""
