#include <Eigen/IterativeLinearSolvers>
#include <Eigen/SparseCore>

#include "methods.hpp"

Timing solveWithEigen(const System &system) {
	using Matrix = Eigen::SparseMatrix<double, Eigen::RowMajor>;
	// The order of the matrix: minimum degree took 844 steps instead of 63 on the strong case of 62 k.
	using Preconditioner =
	    Eigen::IncompleteCholesky<double, Eigen::Lower, Eigen::NaturalOrdering<int>>;
	const Rows rows = bothTriangles(system, true);
	Matrix matrix = Eigen::Map<const Matrix>(system.n, system.n, rows.start[system.n],
	                                         rows.start.data(), rows.column.data(),
	                                         rows.value.data());
	const Eigen::Map<const Eigen::VectorXd> right(system.b.data(), system.n);
	const double begin = now();
	// Both triangles by rows: each value of a product is then one sum. Its second thread gained nothing.
	Eigen::ConjugateGradient<Matrix, Eigen::Lower | Eigen::Upper, Preconditioner> solver;
	solver.setTolerance(0.9 * TOLERANCE);
	solver.compute(matrix);
	const double prepared = now();
	const Eigen::VectorXd answer = solver.solve(right);
	const double solved = now();
	Timing timing;
	timing.phases = {{"prepare", 1e3 * (prepared - begin)}, {"solve", 1e3 * (solved - prepared)}};
	timing.iterations = static_cast<int>(solver.iterations());
	std::vector<double> rest;
	timing.residual = residualOf(system, answer.data(), rest);
	timing.peakMb = peakMb();
	return timing;
}
