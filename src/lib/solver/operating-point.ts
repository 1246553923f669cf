/** What a solve answers: the operating point of one mode and one corner, with its proof. */

import type { GridCache } from './grid-cache.ts';

export type RegulatorState = 'regulating' | 'limited' | 'idle' | 'dropout' | 'off';

/** How the shared slow loop of one net stands. */
export interface SenseAnswer {
	/** Index into `network.nets`. */
	readonly net: number;
	/** Common correction of the set points, V. */
	readonly correctionV: number;
	/** Nominal volts minus the weighted mean that the loop sees, V. */
	readonly errorV: number;
	readonly state: 'holding' | 'at-range';
}

/** The figures by which a result proves itself (recomputed from the final voltages). */
export interface Proof {
	/** Largest Kirchhoff mismatch at any node of any net, A. */
	readonly kclMaxA: number;
	/** The same as a fraction of the total load current (see `currentScale`). */
	readonly kclRelative: number;
	/** |source power - losses - load power| / source power. */
	readonly powerRelative: number;
	/** Every regulator's state agrees with its current and voltages, every sense loop with its error. */
	readonly statesConsistent: boolean;
}

/** Where the power of one net goes, W; a regulator's loss counts with its output net. */
export interface PowerOfNet {
	loadW: number;
	regulatorW: number;
	/** Straps and vias. */
	gridW: number;
	/** Series resistance of the feeds. */
	feedW: number;
}

export interface SolveStatistics {
	readonly method: string;
	readonly newtonSteps: number;
	/** Iterations of the inner linear solves, all Newton steps together. */
	readonly iterations: number;
	/** Relative residual of the last linear solve. */
	readonly residual: number;
	/** Seconds by the caller's clock. */
	readonly setupSeconds: number;
	readonly solveSeconds: number;
}

export interface SolveWarning {
	readonly code: string;
	readonly message: string;
	readonly subject?: string;
	readonly atUm?: readonly [number, number];
}

export interface OperatingPoint {
	readonly mode: string;
	readonly corner: string;
	/** Voltage of every node against 0 V. Length `network.nodes.count`. */
	readonly voltage: Float64Array;
	/** Resistance of every resistor in the corner, ohm. Length `network.resistors.count`. */
	readonly resistorOhm: Float64Array;
	/** Volts that each net's drops are counted from: nominal, or the mode's for an input net. */
	readonly nominalV: Float64Array;
	/** Current of every regulator into its output net, A; 0 when off. Order of the floorplan. */
	readonly regulatorAmps: Float64Array;
	readonly regulatorStates: readonly RegulatorState[];
	/** Set point of every regulator against its ground reference, shared correction included, V. */
	readonly regulatorSetV: Float64Array;
	/** Current of every attachment of `network.loads`, A. */
	readonly loadAmps: Float64Array;
	/**
	 * Current of every feed, A: positive from the source into an input net, and from a ground net to
	 * 0 V. Order of the floorplan.
	 */
	readonly feedAmps: Float64Array;
	/** Loss of every regulator, quiescent current included, W; 0 when off. */
	readonly regulatorLossW: Float64Array;
	/** Power that the sources deliver, W: input feeds, and ideal inputs at their set point. */
	readonly sourceW: number;
	/** Where it goes, per net. */
	readonly power: readonly PowerOfNet[];
	readonly sense: readonly SenseAnswer[];
	/** Indices of blocks that see less than a tenth of nominal somewhere. */
	readonly collapsedBlocks: readonly number[];
	readonly proof: Proof;
	readonly statistics: SolveStatistics;
	readonly warnings: readonly SolveWarning[];
}

/** A reason why there is no operating point, with the place where a person can mend it. */
export interface SolveProblem {
	readonly path: string;
	readonly message: string;
	readonly subject?: string;
	readonly atUm?: readonly [number, number];
	/** Where a net cannot carry its loads: constant current wanted, and what its units can give, A. */
	readonly wantedA?: number;
	readonly availableA?: number;
}

export type SolvePhase = 'setup' | 'factor' | 'solve' | 'proof';

export interface SolveOptions {
	/** Id of the mode; default: the first. */
	readonly mode?: string;
	/** Id of the corner; default: the first. */
	readonly corner?: string;
	/** Seconds from any fixed origin. */
	readonly now: () => number;
	/** Called on every phase, and on every Newton step with the mismatch as a fraction of the load. */
	readonly onProgress?: (progress: { phase: SolvePhase; step?: number; mismatch?: number }) => void;
	/** Analyses and factors kept from earlier solves of the same document; see `createGridCache`. */
	readonly cache?: GridCache;
	/** Asked often; true ends the solve with status `stopped`. */
	readonly shouldStop?: () => boolean;
}

export type SolveOutcome =
	| { readonly status: 'solved'; readonly point: OperatingPoint }
	| { readonly status: 'unsolvable'; readonly problems: readonly SolveProblem[] }
	| {
			readonly status: 'not-converged';
			readonly problems: readonly SolveProblem[];
			/** Best mismatch reached: the largest at any node, A, and as a fraction of the load. */
			readonly kclMaxA: number;
			readonly kclRelative: number;
			readonly newtonSteps: number;
	  }
	| { readonly status: 'stopped' };
