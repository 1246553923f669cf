#pragma once

#include <string>
#include <utility>
#include <vector>

#include "system.hpp"

/** What a method took from the matrix in memory to its answer. */
struct Timing {
	/** Milliseconds of each phase, in order; their sum is what is compared. */
	std::vector<std::pair<std::string, double>> phases;
	/** Steps of refinement or of the iteration. */
	int iterations = 0;
	double residual = 0;
	/** Most memory over all processes, MB, with the file's system in it. */
	double peakMb = 0;
};

/** CHOLMOD, supernodal: with its own minimum degree, or with the dissection given to it. */
Timing solveWithCholmod(const System &system, bool isGivenOrder);

/**
 * Conjugate gradients with BoomerAMG on all ranks of MPI. The nodes are dealt out in bands of the
 * die beforehand. Called on every rank; the answer is rank 0's.
 */
Timing solveWithHypre(const System &system, int aggressiveLevels);

/** Eigen's conjugate gradients with an incomplete Cholesky factor. */
Timing solveWithEigen(const System &system);
