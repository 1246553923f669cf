/**
 * An operating point at which a simulator starts: it chooses the straight piece of each law that the
 * first step follows, so that this step lands on the answer and all that is left is to confirm it.
 * Strained plans need this, because a general simulator's undamped Newton wanders between the
 * pieces; what the deck states is the same with or without.
 */
export interface DeckStart {
	/** Voltage of every node, V. */
	readonly voltage: Float64Array;
	/** Current and state of every regulator, in the order of the floorplan. */
	readonly regulatorAmps: Float64Array;
	readonly regulatorStates: readonly ('regulating' | 'limited' | 'idle' | 'dropout' | 'off')[];
	/** Current of every attachment of `network.loads`, A. */
	readonly loadAmps: Float64Array;
	/** Corrections of the shared slow loops; `net` is an index into `network.nets`. */
	readonly sense: readonly {
		readonly net: number;
		readonly correctionV: number;
		readonly state: 'holding' | 'at-range';
	}[];
}
