/**
 * Times one general native library on a system that the bench wrote, in a process of its own, from
 * the matrix in memory to an answer of a true relative residual of 1e-10; prints one line of JSON.
 * Reading the files is not counted, nor is bringing the matrix into the library's own form.
 */
#include <mpi.h>

#include <cstdio>
#include <exception>
#include <functional>
#include <map>
#include <string>

#include "methods.hpp"
#include "system.hpp"

namespace {

struct Method {
	bool isParallel;
	std::function<Timing(const System &)> solve;
};

const std::map<std::string, Method> METHODS = {
    {"cholmod-own-order", {false, [](const System &s) { return solveWithCholmod(s, false); }}},
    {"cholmod-given-order", {false, [](const System &s) { return solveWithCholmod(s, true); }}},
    {"eigen", {false, [](const System &s) { return solveWithEigen(s); }}},
    {"hypre", {true, [](const System &s) { return solveWithHypre(s, 0); }}},
    {"hypre-aggressive", {true, [](const System &s) { return solveWithHypre(s, 1); }}}};

void print(const std::string &name, const System &system, const Timing &timing, int processes) {
	std::printf("{\"method\":\"%s\",\"nodes\":%d,\"processes\":%d,\"ms\":{", name.c_str(), system.n,
	            processes);
	double total = 0;
	for (const auto &[phase, ms] : timing.phases) {
		std::printf("\"%s\":%.3f,", phase.c_str(), ms);
		total += ms;
	}
	std::printf("\"total\":%.3f},\"iterations\":%d,\"residual\":%.3e,\"peakMb\":%.1f}\n", total,
	            timing.iterations, timing.residual, timing.peakMb);
}

} // namespace

int main(int count, char **arguments) {
	const auto method = count == 5 ? METHODS.find(arguments[1]) : METHODS.end();
	if (method == METHODS.end()) {
		std::fputs("arguments: expected METHOD A.mtx b.mtx xy.mtx, where METHOD is one of", stderr);
		for (const auto &[name, _] : METHODS) std::fprintf(stderr, " %s", name.c_str());
		std::fputs("\n", stderr);
		return 2;
	}
	try {
		const System system = readSystem(arguments[2], arguments[3], arguments[4]);
		int rank = 0;
		int processes = 1;
		if (method->second.isParallel) {
			MPI_Init(&count, &arguments);
			MPI_Comm_rank(MPI_COMM_WORLD, &rank);
			MPI_Comm_size(MPI_COMM_WORLD, &processes);
		}
		const Timing timing = method->second.solve(system);
		if (rank == 0) print(method->first, system, timing, processes);
		if (method->second.isParallel) MPI_Finalize();
		return 0;
	} catch (const std::exception &error) {
		std::fprintf(stderr, "%s\n", error.what());
		return 2;
	}
}
