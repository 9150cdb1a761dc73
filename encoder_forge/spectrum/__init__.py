"""A Source becomes its Spectrum, typical bases, analytic fidelities and budget tables."""
