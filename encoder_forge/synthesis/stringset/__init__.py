"""Search over sets of basis strings: proven least two-qubit gates for blocks of up to five wires.

The modules in the order of use: `masks` (sets as bit masks, moves), `canonical` (classes of sets), `layers`
(the search), `tabulate` and `table` (its results, shipped whole), `prove` (the search again, without the
table), `choose` (the cheapest among tied sets), `circuit` (from a set to gates), `method` (the front door).
"""
