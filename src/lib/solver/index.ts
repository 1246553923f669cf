export { solveOperatingPoint } from './solve.ts';
export { createGridCache } from './grid-cache.ts';
export type { GridCache } from './grid-cache.ts';
export type {
	OperatingPoint,
	PowerOfNet,
	Proof,
	RegulatorState,
	SenseAnswer,
	SolveOptions,
	SolveOutcome,
	SolvePhase,
	SolveProblem,
	SolveStatistics,
	SolveWarning
} from './operating-point.ts';
export { SOLVER_VERSION } from './version.ts';
