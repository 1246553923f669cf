/** A linear system as the bench writes it, and what is asked of every answer to it. */
#pragma once

#include <string>
#include <vector>

/** Relative residual that every method has to reach, recomputed from the matrix. */
constexpr double TOLERANCE = 1e-10;

struct System {
	int n = 0;
	/**
	 * The lower triangle by rows, which is the upper one by columns: row i holds the entries from
	 * `start[i]` to before `start[i + 1]` (n + 1 of them), columns ascending, the diagonal last.
	 */
	std::vector<int> start;
	std::vector<int> column;
	std::vector<double> value;
	/** Right-hand side and place of each node. */
	std::vector<double> b;
	std::vector<double> x;
	std::vector<double> y;
};

/** Both triangles of a symmetric matrix by rows: `start` of n + 1, columns in no order. */
struct Rows {
	std::vector<int> start;
	std::vector<int> column;
	std::vector<double> value;
};

/** Reads matrix, right-hand side and coordinates. Throws a runtime_error that names file and place. */
System readSystem(const std::string &matrix, const std::string &rhs, const std::string &coords);

/** Both triangles; the values only where they are asked for. */
Rows bothTriangles(const System &system, bool hasValues);

/** r = b - A x, and its norm divided by that of b. */
double residualOf(const System &system, const double *solution, std::vector<double> &r);

/** Seconds since some fixed moment. */
double now();

/** Most memory that this process has held, MB. */
double peakMb();
