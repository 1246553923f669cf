import { seededRandom } from '#lib/demo/index.ts';
import { floorplanSchema, type Floorplan, type FloorplanInput } from '#lib/floorplan/index.ts';

export const BENCH_CASES = ['uniform', 'irregular', 'strong'] as const;
export type BenchCase = (typeof BENCH_CASES)[number];

const PITCH_UM = 10;
const BASE_WIDTH_UM = 0.8;
const REGULATORS_PER_SIDE = 20;
const BLOCK_COLUMNS = 10;
const BLOCK_ROWS = 6;
const CUT_OUT_COLUMNS = 4;
const CUT_OUT_ROWS = 3;
const CUT_OUTS = CUT_OUT_COLUMNS * CUT_OUT_ROWS;
/** Side of a cut-out as a share of the die's. */
const CUT_OUT_SIDE = 0.06;
/**
 * Least distance of a cut-out from the border of its field, as a share of the die's side: on the
 * smallest grid two of them still have a strap between them, so that no piece of the grid is cut off.
 */
const CUT_OUT_MARGIN = 0.05;
/** Strap patterns per layer of the uneven cases, each with a width of its own. */
const PATTERNS = 16;
/** Smallest and largest strap width of each case, as multiples of the base width, and ohm per via. */
const CASES = {
	uniform: { widths: [1, 1], viaOhm: 1 },
	irregular: { widths: [0.5, 4], viaOhm: 1 },
	strong: { widths: [0.2, 10], viaOhm: 20 }
} as const;
/** So few that even the widest straps cross in one cut: every via has the resistance of its case. */
const CUTS_PER_UM2 = 0.01;

const SEED = 4099;

function onGrid(um: number): number {
	return Math.round(um * 1000) / 1000;
}

/**
 * Straps per layer for the wanted number of nodes: two for each crossing, two for the ends of each
 * strap, one for each regulator; what the cut-outs take away is added.
 */
function strapsPerLayer(nodes: number, kind: BenchCase): number {
	const keptShare = kind === 'irregular' ? 1 - CUT_OUTS * CUT_OUT_SIDE ** 2 : 1;
	const crossings = Math.max(0, nodes - REGULATORS_PER_SIDE ** 2) / (2 * keptShare);
	return Math.max(PATTERNS, Math.round(Math.sqrt(1 + crossings) - 1));
}

/** Where a cut-out starts in its field, one of `fields` along the die, as a share of the die's side. */
function placeInField(field: number, fields: number, random: () => number): number {
	const room = 1 / fields - CUT_OUT_SIDE - 2 * CUT_OUT_MARGIN;
	return field / fields + CUT_OUT_MARGIN + room * random();
}

/** Widths from the smallest to the largest in equal ratios, in random order. */
function patternWidthsUm(kind: BenchCase, random: () => number): number[] {
	const [least, most] = CASES[kind].widths;
	if (kind === 'uniform') return [BASE_WIDTH_UM];
	const widths = Array.from({ length: PATTERNS }, (_, k) =>
		onGrid(BASE_WIDTH_UM * least * (most / least) ** (k / (PATTERNS - 1)))
	);
	for (let k = PATTERNS - 1; k > 0; k--) {
		const other = Math.floor(random() * (k + 1));
		[widths[k], widths[other]] = [widths[other], widths[k]];
	}
	return widths;
}

/**
 * A two-layer strap grid of about the wanted number of nodes, fed by 400 regulators and loaded by 60
 * blocks: even, with uneven widths and cut-outs, or with a strong contrast of widths and resistive
 * vias.
 */
export function makeBenchPlan(nodes: number, kind: BenchCase): Floorplan {
	const random = seededRandom(SEED);
	const sideUm = strapsPerLayer(nodes, kind) * PITCH_UM;
	const straps = (['M1', 'M2'] as const).flatMap((layer) =>
		patternWidthsUm(kind, random).map((widthUm, k, { length }) => ({
			id: `${layer}.${k}`,
			net: 'vdd',
			layer,
			pitchUm: length * PITCH_UM,
			widthUm,
			offsetUm: PITCH_UM / 2 + k * PITCH_UM
		}))
	);
	const box = (x: number, y: number, w: number, h: number): [number, number][] => [
		[onGrid(x), onGrid(y)],
		[onGrid(x + w), onGrid(y)],
		[onGrid(x + w), onGrid(y + h)],
		[onGrid(x), onGrid(y + h)]
	];
	const regulatorPitch = sideUm / REGULATORS_PER_SIDE;
	const regulators = Array.from({ length: REGULATORS_PER_SIDE ** 2 }, (_, k) => ({
		id: `R${k}`,
		cell: 'weir',
		input: null,
		output: 'vdd',
		xUm: onGrid(((k % REGULATORS_PER_SIDE) + 0.4) * regulatorPitch),
		yUm: onGrid((Math.floor(k / REGULATORS_PER_SIDE) + 0.4) * regulatorPitch)
	}));
	const [blockWidth, blockHeight] = [sideUm / BLOCK_COLUMNS, sideUm / BLOCK_ROWS];
	const blocks = Array.from({ length: BLOCK_COLUMNS * BLOCK_ROWS }, (_, k) => ({
		id: `B${k}`,
		net: 'vdd',
		outline: box(
			((k % BLOCK_COLUMNS) + 0.1) * blockWidth,
			(Math.floor(k / BLOCK_COLUMNS) + 0.1) * blockHeight,
			0.8 * blockWidth,
			0.8 * blockHeight
		),
		amps: { run: 0.01 + 0.04 * random() }
	}));
	const keepouts: FloorplanInput['keepouts'] =
		kind === 'irregular'
			? Array.from({ length: CUT_OUTS }, (_, k) => ({
					id: `K${k}`,
					outline: box(
						sideUm * placeInField(k % CUT_OUT_COLUMNS, CUT_OUT_COLUMNS, random),
						sideUm * placeInField(Math.floor(k / CUT_OUT_COLUMNS), CUT_OUT_ROWS, random),
						sideUm * CUT_OUT_SIDE,
						sideUm * CUT_OUT_SIDE
					),
					forbids: ['straps' as const]
				}))
			: [];
	return floorplanSchema.parse({
		format: 'manyweir-floorplan',
		version: 1,
		die: { outline: box(0, 0, sideUm, sideUm) },
		layers: [
			{ id: 'M1', direction: 'vertical', sheetOhm: 0.05 },
			{ id: 'M2', direction: 'horizontal', sheetOhm: 0.05 }
		],
		vias: [
			{
				id: 'V1',
				lower: 'M1',
				upper: 'M2',
				ohmPerCut: CASES[kind].viaOhm,
				cutsPerUm2: CUTS_PER_UM2
			}
		],
		nets: [{ id: 'vdd', kind: 'regulated', volts: 1 }],
		straps,
		cells: [
			{
				id: 'weir',
				widthUm: 1,
				heightUm: 1,
				outputOhm: 0.1,
				onOhm: 1,
				maxA: 10,
				minA: 0,
				quiescentA: 0,
				offsetSigmaV: 0
			}
		],
		regulators,
		blocks,
		keepouts,
		modes: [{ id: 'run' }]
	} satisfies FloorplanInput);
}
