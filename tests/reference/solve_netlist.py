"""Solves a resistor netlist (cards R, I, V; gzip) with SciPy's general sparse direct solver.

Usage: solve_netlist.py deck.sp.gz
Prints one line `node volts` per node, sorted by name, and last `residual <norm(b - A x) / norm(b)>`.
"""

import gzip
import sys

import numpy as np
from scipy.sparse import coo_matrix, csc_matrix
from scipy.sparse.linalg import spsolve


def main() -> None:
    resistors, loads, held = [], [], {}
    with gzip.open(sys.argv[1], "rt") as deck:
        for line in deck:
            fields = line.split()
            if len(fields) < 4:
                continue
            kind, first, second, value = fields[0][0], fields[1], fields[2], float(fields[3])
            if kind == "R":
                resistors.append((first, second, value))
            elif kind == "I":
                loads.append((first, value))
            elif kind == "V":
                held[first] = value
    names = sorted({name for first, second, _ in resistors for name in (first, second)})
    free = {name: index for index, name in enumerate(n for n in names if n not in held)}
    rows, columns, values = [], [], []
    right = np.zeros(len(free))
    for first, second, ohm in resistors:
        for here, there in ((first, second), (second, first)):
            if here not in free:
                continue
            rows.append(free[here])
            columns.append(free[here])
            values.append(1 / ohm)
            if there in free:
                rows.append(free[here])
                columns.append(free[there])
                values.append(-1 / ohm)
            else:
                right[free[here]] += held[there] / ohm
    for name, amps in loads:
        if name in free:
            right[free[name]] -= amps
    matrix = csc_matrix(coo_matrix((values, (rows, columns)), shape=(len(free), len(free))))
    volts = spsolve(matrix, right)
    for name in names:
        print(name, repr(float(held[name] if name in held else volts[free[name]])))
    print("residual", repr(float(np.linalg.norm(right - matrix @ volts) / np.linalg.norm(right))))


main()
