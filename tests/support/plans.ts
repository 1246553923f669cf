/** Builders of small plans whose networks can be counted by hand. */
import { floorplanSchema } from '#lib/floorplan/index.ts';
import type { Floorplan, FloorplanInput, PointUm } from '#lib/floorplan/index.ts';

type Parts = Partial<Omit<FloorplanInput, 'format' | 'version'>>;
type RegulatorInput = NonNullable<FloorplanInput['regulators']>[number];
type CellInput = NonNullable<FloorplanInput['cells']>[number];
type BlockInput = NonNullable<FloorplanInput['blocks']>[number];
type FeedInput = NonNullable<FloorplanInput['feeds']>[number];

/** Corners of a rectangle, um, counter-clockwise from the lower left. */
export function rectangle(minX: number, minY: number, maxX: number, maxY: number): PointUm[] {
	return [
		[minX, minY],
		[maxX, minY],
		[maxX, maxY],
		[minX, maxY]
	];
}

/** A document of the given parts, parsed: every default filled in. */
export function planOf(
	parts: Parts & Pick<FloorplanInput, 'die' | 'layers' | 'nets' | 'straps'>
): Floorplan {
	return floorplanSchema.parse({ format: 'manyweir-floorplan', version: 1, ...parts });
}

export const CELL_UM = 2;

/** A regulator cell of 2 um x 2 um with its pins in the centre. */
export function cellOf(id: string, values: Partial<CellInput> = {}): CellInput {
	return {
		id,
		widthUm: CELL_UM,
		heightUm: CELL_UM,
		outputOhm: 0.05,
		onOhm: 0.4,
		maxA: 1,
		minA: 0,
		quiescentA: 0,
		offsetSigmaV: 0,
		...values
	};
}

/** A unit of `cellOf` whose pins stand at a place, with an ideal input unless one is given. */
export function regulatorAt(
	id: string,
	output: string,
	xUm: number,
	yUm: number,
	values: Partial<RegulatorInput> = {}
): RegulatorInput {
	return {
		id,
		cell: 'unit',
		input: null,
		output,
		xUm: xUm - CELL_UM / 2,
		yUm: yUm - CELL_UM / 2,
		...values
	};
}

/** A square load of 2 um around a place, drawing `amps` in the mode `default`. */
export function loadAt(
	id: string,
	net: string,
	xUm: number,
	yUm: number,
	amps: number,
	values: Partial<BlockInput> = {}
): BlockInput {
	return {
		id,
		net,
		outline: rectangle(xUm - 1, yUm - 1, xUm + 1, yUm + 1),
		amps: { default: amps },
		...values
	};
}

export function feedAt(
	id: string,
	net: string,
	xUm: number,
	yUm: number,
	seriesOhm: number,
	values: Partial<FeedInput> = {}
): FeedInput {
	return { id, net, xUm, yUm, seriesOhm, ...values };
}

export interface LatticeOptions {
	/** Straps along y and along x: the lattice has columns x rows crossings. */
	readonly columns: number;
	readonly rows: number;
	readonly pitchUm?: number;
	/** Resistance of one strap piece between neighbouring crossings, ohm. */
	readonly bondOhm?: number;
	/** Resistance of the via at a crossing, ohm; small enough to make the two nodes one. */
	readonly viaOhm?: number;
	readonly kind?: 'input' | 'regulated' | 'ground';
	readonly volts?: number;
}

/**
 * One net `vdd` as a square lattice: straps along x on `m1` and along y on `m2`, crossing at
 * multiples of the pitch from 0, 0. Crossing (i, j) has a node on each layer, joined by a via.
 */
export function latticePlan(
	{
		columns,
		rows,
		pitchUm = 10,
		bondOhm = 1,
		viaOhm = 1e-9,
		kind = 'regulated',
		volts = 1
	}: LatticeOptions,
	parts: Parts = {}
): Floorplan {
	const widthUm = pitchUm / 10;
	const sheetOhm = bondOhm / 10;
	return planOf({
		die: { outline: rectangle(0, 0, (columns - 1) * pitchUm, (rows - 1) * pitchUm) },
		layers: [
			{ id: 'm1', direction: 'horizontal', sheetOhm },
			{ id: 'm2', direction: 'vertical', sheetOhm }
		],
		vias: [{ id: 'v1', lower: 'm1', upper: 'm2', ohmPerCut: viaOhm, cutsPerUm2: 0 }],
		nets: [{ id: 'vdd', kind, volts }],
		straps: [
			{ id: 'h', net: 'vdd', layer: 'm1', pitchUm, widthUm, offsetUm: 0 },
			{ id: 'v', net: 'vdd', layer: 'm2', pitchUm, widthUm, offsetUm: 0 }
		],
		cells: [cellOf('unit')],
		...parts
	});
}

export interface LadderOptions {
	readonly lengthUm?: number;
	/** Resistance of the whole strap, ohm. */
	readonly totalOhm?: number;
	readonly kind?: 'input' | 'regulated' | 'ground';
	readonly volts?: number;
}

/** One net `vdd` of a single strap along x at y = 0 from 0 to `lengthUm`, without crossings. */
export function ladderPlan(
	{ lengthUm = 100, totalOhm = 1, kind = 'regulated', volts = 1 }: LadderOptions,
	parts: Parts = {}
): Floorplan {
	return planOf({
		die: { outline: rectangle(0, -5, lengthUm, 5) },
		layers: [{ id: 'm1', direction: 'horizontal', sheetOhm: totalOhm / lengthUm }],
		nets: [{ id: 'vdd', kind, volts }],
		straps: [{ id: 'h', net: 'vdd', layer: 'm1', pitchUm: 10, widthUm: 1, offsetUm: 0 }],
		cells: [cellOf('unit')],
		...parts
	});
}
