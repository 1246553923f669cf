import { seededRandom } from '#lib/demo/index.ts';
import { floorplanSchema, type Floorplan, type FloorplanInput } from '#lib/floorplan/index.ts';

export const BENCH_CASES = ['uniform', 'irregular', 'strong'] as const;
export type BenchCase = (typeof BENCH_CASES)[number];

const PITCH_UM = 10;
const BASE_WIDTH_UM = 0.8;
const REGULATORS_PER_SIDE = 20;
const BLOCK_COLUMNS = 10;
const BLOCK_ROWS = 6;
const CUT_OUTS = 12;
/** Strap patterns per layer of the uneven cases, each with a width of its own. */
const PATTERNS = 8;
/** Smallest and largest strap width of each case, as multiples of the base width, and ohm per cut. */
const CASES = {
	uniform: { widths: [1, 1], ohmPerCut: 1 },
	irregular: { widths: [0.5, 4], ohmPerCut: 1 },
	strong: { widths: [0.2, 10], ohmPerCut: 20 }
} as const;

const SEED = 4099;

function onGrid(um: number): number {
	return Math.round(um * 1000) / 1000;
}

/**
 * A two-layer strap grid of about the wanted number of nodes (two per crossing), fed by 400
 * regulators and loaded by 60 blocks: even, with uneven widths and cut-outs, or with a strong
 * contrast of widths and resistive vias.
 */
export function makeBenchPlan(nodes: number, kind: BenchCase): Floorplan {
	const random = seededRandom(SEED);
	const lines = Math.max(PATTERNS, Math.round(Math.sqrt(nodes / 2)));
	const sideUm = lines * PITCH_UM;
	const { widths, ohmPerCut } = CASES[kind];
	const patterns = kind === 'uniform' ? 1 : PATTERNS;
	const straps = (['M1', 'M2'] as const).flatMap((layer) =>
		Array.from({ length: patterns }, (_, k) => ({
			id: `${layer}.${k}`,
			net: 'vdd',
			layer,
			pitchUm: patterns * PITCH_UM,
			widthUm: onGrid(BASE_WIDTH_UM * widths[0] * (widths[1] / widths[0]) ** random()),
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
						sideUm * (0.05 + 0.8 * random()),
						sideUm * (0.05 + 0.8 * random()),
						sideUm * 0.06,
						sideUm * 0.06
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
		vias: [{ id: 'V1', lower: 'M1', upper: 'M2', ohmPerCut, cutsPerUm2: 1 }],
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
