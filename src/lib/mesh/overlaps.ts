import { NM_PER_UM } from '#lib/floorplan/index.ts';
import type { ModelWarning, NetworkShort } from './network.ts';
import type { PlanIndex } from './plan-index.ts';
import type { Runs } from './runs.ts';

interface Overlap {
	readonly layer: number;
	/** Patterns, in the document's order. */
	readonly first: number;
	readonly second: number;
	readonly atUm: readonly [number, number];
	count: number;
}

/** Middle of the shape that two overlapping runs share, um. */
function middleUm(plan: PlanIndex, runs: Runs, a: number, b: number): readonly [number, number] {
	const halfA = plan.patterns[runs.strap[a]].widthNm / 2;
	const halfB = plan.patterns[runs.strap[b]].widthNm / 2;
	const low = Math.max(runs.coordinateNm[a] - halfA, runs.coordinateNm[b] - halfB);
	const high = Math.min(runs.coordinateNm[a] + halfA, runs.coordinateNm[b] + halfB);
	const from = Math.max(runs.startNm[a], runs.startNm[b]);
	const to = Math.min(runs.endNm[a], runs.endNm[b]);
	const across = Math.round((low + high) / 2) / NM_PER_UM;
	const along = Math.round((from + to) / 2) / NM_PER_UM;
	return plan.isHorizontal[runs.layer[a]] ? [along, across] : [across, along];
}

/** Overlapping straps of one layer, by pair of patterns; straps that only touch do not overlap. */
function findOverlaps(plan: PlanIndex, runs: Runs, layer: number): Overlap[] {
	const { patterns, netCount, layerCount } = plan;
	const onLayer: number[] = [];
	for (let net = 0; net < netCount; net++) {
		const group = net * layerCount + layer;
		for (let run = runs.groupStart[group]; run < runs.groupStart[group + 1]; run++) {
			onLayer.push(run);
		}
	}
	const { coordinateNm, startNm, endNm, strap } = runs;
	onLayer.sort((a, b) => coordinateNm[a] - coordinateNm[b] || startNm[a] - startNm[b] || a - b);
	const widest = onLayer.reduce((max, run) => Math.max(max, patterns[strap[run]].widthNm), 0);

	const found = new Map<number, Overlap>();
	for (let i = 0; i < onLayer.length; i++) {
		const a = onLayer[i];
		const widthA = patterns[strap[a]].widthNm;
		for (let j = i + 1; j < onLayer.length; j++) {
			const b = onLayer[j];
			const apart = coordinateNm[b] - coordinateNm[a];
			if (2 * apart >= widthA + widest) break;
			if (2 * apart >= widthA + patterns[strap[b]].widthNm) continue;
			if (startNm[b] >= endNm[a] || startNm[a] >= endNm[b]) continue;
			const first = Math.min(strap[a], strap[b]);
			const second = Math.max(strap[a], strap[b]);
			const key = first * patterns.length + second;
			const known = found.get(key);
			if (known !== undefined) known.count++;
			else {
				found.set(key, { layer, first, second, atUm: middleUm(plan, runs, a, b), count: 1 });
			}
		}
	}
	return [...found.values()].sort((a, b) => a.first - b.first || a.second - b.second);
}

/**
 * Straps whose shapes overlap on one layer: of one net a warning (they stay separate conductors),
 * of different nets a short, which is a finding of the result. Both are solved all the same.
 */
export function checkOverlaps(
	plan: PlanIndex,
	runs: Runs
): { warnings: ModelWarning[]; shorts: NetworkShort[] } {
	const warnings: ModelWarning[] = [];
	const shorts: NetworkShort[] = [];
	const { floorplan, patterns } = plan;
	for (let layer = 0; layer < plan.layerCount; layer++) {
		for (const { first, second, atUm, count } of findOverlaps(plan, runs, layer)) {
			const a = patterns[first];
			const b = patterns[second];
			const layerId = floorplan.layers[layer].id;
			if (a.net !== b.net) {
				shorts.push({
					layer: layerId,
					nets: [floorplan.nets[a.net].id, floorplan.nets[b.net].id],
					straps: [a.id, b.id],
					count,
					atUm
				});
				continue;
			}
			const who = first === second ? `straps of ${a.id}` : `straps of ${a.id} and ${b.id}`;
			warnings.push({
				code: 'strap-overlap',
				message:
					`${who} overlap on ${layerId} in ${count} place${count === 1 ? '' : 's'}; ` +
					`they are taken as separate conductors`,
				subject: a.id,
				atUm
			});
		}
	}
	return { warnings, shorts };
}
