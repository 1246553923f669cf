"""Solves A x = b with SciPy's general sparse direct solver.

Usage: solve_matrix.py A.mtx b.mtx x.mtx
"""

import sys

from scipy.io import mmread, mmwrite
from scipy.sparse import csc_matrix
from scipy.sparse.linalg import spsolve

matrix_path, rhs_path, out_path = sys.argv[1:]
x = spsolve(csc_matrix(mmread(matrix_path)), mmread(rhs_path).ravel())
mmwrite(out_path, x.reshape(-1, 1), precision=17)
