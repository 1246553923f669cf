/**
 * The resistor network that a floorplan describes (model section 3): topology and nominal values,
 * the same for every mode and corner. All nodes of all nets share one numbering in which each net
 * owns a contiguous range, so that a net's system is a slice of the whole.
 *
 * Index arrays hold -1 where they say "or -1".
 */

/** One net's slice of the node numbering. */
export interface NetworkNet {
	readonly id: string;
	readonly kind: 'input' | 'regulated' | 'ground';
	/** Nominal volts. */
	readonly volts: number;
	/** First node of the net; its nodes are firstNode .. firstNode + nodeCount - 1. */
	readonly firstNode: number;
	/** 0 for a net that has no straps, or none that are connected to a source. */
	readonly nodeCount: number;
	/**
	 * Index into `floorplan.layers` of the lowest and the highest layer on which the net has nodes;
	 * -1 for a net without nodes.
	 */
	readonly lowestLayer: number;
	readonly highestLayer: number;
}

export interface NetworkNodes {
	readonly count: number;
	/** Position, integer nm. Length `count`. */
	readonly xNm: Int32Array;
	readonly yNm: Int32Array;
	/** Index into `floorplan.layers`. Length `count`. */
	readonly layer: Uint8Array;
	/** Index into `Network.nets`. Length `count`. */
	readonly net: Uint16Array;
	/**
	 * The ground node that a load or probe at this node sees, or -1 where the ground is ideal (also
	 * for the ground net's own nodes). The model does not define "local ground" further; our reading
	 * is the nearest node (straight distance, ties: lowest index) of the ground net's lowest layer.
	 */
	readonly localGround: Int32Array;
}

export const RESISTOR_SEGMENT = 0;
export const RESISTOR_VIA = 1;

export interface NetworkResistors {
	readonly count: number;
	/** End nodes; both belong to the same net. Length `count`. */
	readonly from: Int32Array;
	readonly to: Int32Array;
	/** Resistance at each layer's `refC` and metal scale 1, ohm; a corner scales it (see `resistancesAt`). */
	readonly nominalOhm: Float64Array;
	/** RESISTOR_SEGMENT (piece of a strap) or RESISTOR_VIA. */
	readonly kind: Uint8Array;
	/** Index into `floorplan.straps` for a segment, into `floorplan.vias` for a via. */
	readonly source: Int32Array;
	/** Layer whose temperature coefficient applies: the strap's, or the lower one of a via. */
	readonly layer: Uint8Array;
	/** Cuts in parallel of a via; 0 for a segment. */
	readonly cuts: Int32Array;
}

/** Taps of feeds, in the order of `floorplan.feeds`. */
export interface NetworkFeeds {
	/** Node it joins, or -1 where its net has no strap to join. */
	readonly node: Int32Array;
	readonly seriesOhm: Float64Array;
}

/** Taps of regulator pins, in the order of `floorplan.regulators`. */
export interface NetworkRegulators {
	/** Node of the output net, or -1 where there is none (only for units that are not enabled). */
	readonly outputNode: Int32Array;
	/** Node of the input net, or -1 for an ideal input. */
	readonly inputNode: Int32Array;
	/** Node of the ground net, or -1 for an ideal ground. */
	readonly groundNode: Int32Array;
}

/** Where block currents attach: one entry per block and node. */
export interface NetworkLoads {
	readonly count: number;
	/** Index into `floorplan.blocks`; entries of one block are contiguous and in block order. */
	readonly block: Int32Array;
	readonly node: Int32Array;
	/** Ground node into which the current returns, or -1 for an ideal ground. */
	readonly groundNode: Int32Array;
	/** Share of the block's current; the shares of one block sum to 1 within 1e-12. */
	readonly share: Float64Array;
}

/** Straps of two nets whose shapes overlap on one layer: a finding, solved all the same. */
export interface NetworkShort {
	/** Id of the layer. */
	readonly layer: string;
	/** Ids of the two nets and of their strap patterns, in the order of the document's straps. */
	readonly nets: readonly [string, string];
	readonly straps: readonly [string, string];
	/** How many pairs of single straps of the two patterns overlap. */
	readonly count: number;
	/** Middle of the first overlap, um. */
	readonly atUm: readonly [number, number];
}

/** Something a person should know about; never a reason not to solve. */
export interface ModelWarning {
	readonly code: string;
	readonly message: string;
	/** Id of the item it is about. */
	readonly subject?: string;
	readonly atUm?: readonly [number, number];
}

/** Something that makes the plan unsolvable, with the place where a person can mend it. */
export interface ModelProblem {
	/** Path of the item in the document, naming ids, for example `blocks (cpu)`. */
	readonly path: string;
	readonly message: string;
	readonly subject?: string;
	readonly atUm?: readonly [number, number];
}

export interface Network {
	readonly nets: readonly NetworkNet[];
	readonly nodes: NetworkNodes;
	readonly resistors: NetworkResistors;
	readonly feeds: NetworkFeeds;
	readonly regulators: NetworkRegulators;
	readonly loads: NetworkLoads;
	readonly shorts: readonly NetworkShort[];
	/** Nodes that belong to no source and carry nothing, left out of the numbering. */
	readonly leftOutNodes: number;
	readonly warnings: readonly ModelWarning[];
}

export type MeshResult =
	| { readonly status: 'meshed'; readonly network: Network }
	| { readonly status: 'refused'; readonly problems: readonly ModelProblem[] };

/** Resistances at a corner, ohm, in the order of `Network.resistors`. */
export type ResistancesResult =
	| { readonly status: 'scaled'; readonly ohm: Float64Array }
	| { readonly status: 'refused'; readonly problems: readonly ModelProblem[] };
