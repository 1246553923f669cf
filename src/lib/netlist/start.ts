/**
 * An operating point from which a simulator starts. It chooses the straight piece of each law that
 * the first step follows, and is needed only where a plan is so strained that a general simulator's
 * undamped Newton would wander between pieces; what the deck states is the same with or without.
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
