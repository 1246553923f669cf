/**
 * An operating point at which a simulator starts. Its first step then lands there, and all that is
 * left is to confirm it. Strained plans need this, because a general simulator's undamped Newton
 * wanders between the pieces of the laws; what the deck states is the same with or without.
 */
export interface DeckStart {
	/** Voltage of every node, V. */
	readonly voltage: Float64Array;
	/** Current of every regulator into its output net, A, in the order of the floorplan. */
	readonly regulatorAmps: Float64Array;
	/** Current of every attachment of `network.loads`, A. */
	readonly loadAmps: Float64Array;
	/**
	 * The shared slow loops: `net` is an index into `network.nets`, `errorV` nominal volts minus the
	 * mean that the loop sees.
	 */
	readonly sense: readonly {
		readonly net: number;
		readonly correctionV: number;
		readonly errorV: number;
		readonly state: 'holding' | 'at-range';
	}[];
}
