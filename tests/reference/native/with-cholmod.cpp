#include <suitesparse/cholmod.h>

#include <stdexcept>

#include "dissection.hpp"
#include "methods.hpp"

namespace {

/** Most steps of refinement; none is needed for a well scaled matrix. */
constexpr int MOST_STEPS = 10;

cholmod_dense asColumn(std::vector<double> &values) {
	cholmod_dense column{};
	column.nrow = column.d = column.nzmax = values.size();
	column.ncol = 1;
	column.x = values.data();
	column.xtype = CHOLMOD_REAL;
	column.dtype = CHOLMOD_DOUBLE;
	return column;
}

} // namespace

Timing solveWithCholmod(const System &system, bool isGivenOrder) {
	cholmod_common common;
	cholmod_start(&common);
	common.supernodal = CHOLMOD_SUPERNODAL;
	common.nmethods = 1;
	common.method[0].ordering = isGivenOrder ? CHOLMOD_GIVEN : CHOLMOD_AMD;
	cholmod_sparse matrix{};
	matrix.nrow = matrix.ncol = system.n;
	matrix.nzmax = system.column.size();
	// CHOLMOD writes into none of them.
	matrix.p = const_cast<int *>(system.start.data());
	matrix.i = const_cast<int *>(system.column.data());
	matrix.x = const_cast<double *>(system.value.data());
	// The upper triangle: of the two that it takes, the one that spares it a transposition.
	matrix.stype = 1;
	matrix.itype = CHOLMOD_INT;
	matrix.xtype = CHOLMOD_REAL;
	matrix.dtype = CHOLMOD_DOUBLE;
	matrix.sorted = matrix.packed = 1;

	const double begin = now();
	std::vector<int> order;
	if (isGivenOrder) order = dissect(system);
	const double ordered = now();
	cholmod_factor *factor = cholmod_analyze_p(
	    &matrix, isGivenOrder ? order.data() : nullptr, nullptr, 0, &common);
	const double analysed = now();
	cholmod_factorize(&matrix, factor, &common);
	const double factored = now();
	if (!factor || common.status != CHOLMOD_OK) throw std::runtime_error("CHOLMOD made no factor");

	std::vector<double> answer(system.n, 0);
	std::vector<double> rest = system.b;
	Timing timing;
	double solveSeconds = 0;
	for (int step = 0;; step++) {
		const double stepped = now();
		cholmod_dense right = asColumn(rest);
		cholmod_dense *change = cholmod_solve(CHOLMOD_A, factor, &right, &common);
		const double *values = static_cast<const double *>(change->x);
		for (int i = 0; i < system.n; i++) answer[i] += values[i];
		cholmod_free_dense(&change, &common);
		const double solved = now();
		solveSeconds += solved - stepped;
		timing.residual = residualOf(system, answer.data(), rest);
		timing.iterations = step;
		if (timing.residual <= TOLERANCE || step == MOST_STEPS) break;
		// Only a residual that another step needs is part of the work.
		solveSeconds += now() - solved;
	}
	timing.phases = {{"order", 1e3 * (ordered - begin)},
	                 {"analyse", 1e3 * (analysed - ordered)},
	                 {"factor", 1e3 * (factored - analysed)},
	                 {"solve", 1e3 * solveSeconds}};
	timing.peakMb = peakMb();
	cholmod_free_factor(&factor, &common);
	cholmod_finish(&common);
	return timing;
}
