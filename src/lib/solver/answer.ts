import type { RegulatorState } from './operating-point.ts';

/** The answer whose proof is asked for: voltages and the currents reported with them. */
export interface Answer {
	readonly voltage: Float64Array;
	readonly correctionV: Float64Array;
	/** Per enabled regulator, in the circuit's order. */
	readonly regulatorAmps: Float64Array;
	readonly regulatorStates: readonly RegulatorState[];
	readonly loadAmps: Float64Array;
	/** Per feed of the circuit, A, positive from the source into the net. */
	readonly feedAmps: Float64Array;
}

/** Volts at a node; 0 for an ideal ground (-1). */
export function volts(voltage: Float64Array, node: number): number {
	return node < 0 ? 0 : voltage[node];
}
