import type { Corner, Floorplan } from '#lib/floorplan/index.ts';
import type { Components } from './components.ts';
import type { Crossings } from './crossings.ts';
import {
	RESISTOR_SEGMENT,
	RESISTOR_VIA,
	type ModelProblem,
	type Network,
	type NetworkResistors,
	type ResistancesResult
} from './network.ts';
import type { Numbering } from './nodes.ts';
import type { PlanIndex } from './plan-index.ts';
import type { Points } from './points.ts';
import type { Runs } from './runs.ts';

const NM2_PER_UM2 = 1e6;

/**
 * Cuts of a via at the crossing of two widths: max(1, floor(w1 * w2 * cutsPerUm2)). The product is
 * raised by a few units in the last place so that 3.9999999999999996 counts as the 4 it stands for.
 */
function cutsAt(width1Nm: number, width2Nm: number, cutsPerUm2: number): number {
	const cuts = (width1Nm * width2Nm * cutsPerUm2) / NM2_PER_UM2;
	return Math.max(1, Math.floor(cuts * (1 + 4 * Number.EPSILON)));
}

/** The resistors of every sourced part: pieces of straps in the order of the nodes, then vias. */
export function buildResistors(
	{ floorplan, patterns }: PlanIndex,
	runs: Runs,
	crossings: Crossings,
	points: Points,
	{ isSourced }: Components,
	{ shift }: Numbering
): NetworkResistors {
	let count = 0;
	for (let run = 0; run < runs.count; run++) {
		if (isSourced[run] === 1) count += points.start[run + 1] - points.start[run] - 1;
	}
	for (let c = 0; c < crossings.count; c++) count += isSourced[crossings.horizontalRun[c]];

	const from = new Int32Array(count);
	const to = new Int32Array(count);
	const nominalOhm = new Float64Array(count);
	const kind = new Uint8Array(count).fill(RESISTOR_SEGMENT);
	const source = new Int32Array(count);
	const layer = new Uint8Array(count);
	const cuts = new Int32Array(count);
	const position = points.alongNm;

	let r = 0;
	for (let run = 0; run < runs.count; run++) {
		if (isSourced[run] === 0) continue;
		const strap = runs.strap[run];
		const ohmPerNm = floorplan.layers[runs.layer[run]].sheetOhm / patterns[strap].widthNm;
		const firstResistor = r;
		for (let p = points.start[run] + 1; p < points.start[run + 1]; p++) {
			to[r] = p + shift[run];
			from[r] = to[r] - 1;
			nominalOhm[r] = ohmPerNm * (position[p] - position[p - 1]);
			r++;
		}
		source.fill(strap, firstResistor, r);
		layer.fill(runs.layer[run], firstResistor, r);
	}

	// Within a batch the crossings of each run ascend, so a cursor per run finds their points.
	const cursor = new Int32Array(runs.count);
	for (const { via: v, lowerLayer, first, count: pairs } of crossings.batches) {
		const { ohmPerCut, cutsPerUm2 } = floorplan.vias[v];
		for (let run = 0; run < runs.count; run++) cursor[run] = points.start[run];
		const firstResistor = r;
		for (let c = first; c < first + pairs; c++) {
			const h = crossings.horizontalRun[c];
			const q = crossings.verticalRun[c];
			if (isSourced[h] === 0) continue;
			const x = runs.coordinateNm[q];
			const y = runs.coordinateNm[h];
			let ph = cursor[h];
			let pq = cursor[q];
			while (position[ph] < x) ph++;
			while (position[pq] < y) pq++;
			cursor[h] = ph;
			cursor[q] = pq;
			const isHorizontalLower = runs.layer[h] === lowerLayer;
			from[r] = isHorizontalLower ? ph + shift[h] : pq + shift[q];
			to[r] = isHorizontalLower ? pq + shift[q] : ph + shift[h];
			cuts[r] = cutsAt(
				patterns[runs.strap[h]].widthNm,
				patterns[runs.strap[q]].widthNm,
				cutsPerUm2
			);
			nominalOhm[r] = ohmPerCut / cuts[r];
			r++;
		}
		kind.fill(RESISTOR_VIA, firstResistor, r);
		source.fill(v, firstResistor, r);
		layer.fill(lowerLayer, firstResistor, r);
	}
	return { count, from, to, nominalOhm, kind, source, layer, cuts };
}

/**
 * Resistances at a corner, ohm: nominal * (1 + tempCoPerC * (T - refC)) * metalScale, with the
 * coefficient of `resistors.layer` (model section 3.5). Refused where a layer in use has a
 * temperature factor that is not above 0.
 */
export function resistancesAt(
	{ resistors }: Network,
	floorplan: Floorplan,
	corner: Corner
): ResistancesResult {
	const factor = Float64Array.from(
		floorplan.layers,
		(layer) => (1 + layer.tempCoPerC * (corner.temperatureC - layer.refC)) * corner.metalScale
	);
	const isUsed = new Uint8Array(floorplan.layers.length);
	const ohm = new Float64Array(resistors.count);
	for (let r = 0; r < resistors.count; r++) {
		const layer = resistors.layer[r];
		isUsed[layer] = 1;
		ohm[r] = resistors.nominalOhm[r] * factor[layer];
	}
	const problems = floorplan.layers.flatMap((layer, l): ModelProblem[] =>
		isUsed[l] === 0 || factor[l] > 0
			? []
			: [
					{
						path: `corners (${corner.id})`,
						message:
							`at ${corner.temperatureC} C the resistance of layer ${layer.id} is multiplied by ` +
							`${factor[l]} (expected a factor above 0: check its tempCoPerC and refC)`,
						subject: corner.id
					}
				]
	);
	return problems.length > 0 ? { status: 'refused', problems } : { status: 'scaled', ohm };
}
