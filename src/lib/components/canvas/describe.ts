import { findItem, type ItemReference } from '#lib/floorplan/edits/index.ts';
import type { Floorplan } from '#lib/floorplan/index.ts';
import { referenceOf } from '#lib/editor/index.ts';
import type { Reading } from '#lib/editor/index.ts';
import type { RegulatorResult } from '#lib/results/index.ts';
import { formatQuantity } from '#lib/units/index.ts';

/** An item in a sentence, with its place and, where known, how it works. */
function describeItem(
	floorplan: Floorplan,
	{ list, id }: ItemReference,
	results: ReadonlyMap<string, RegulatorResult>
): string {
	if (list === 'regulators') {
		const regulator = findItem(floorplan, list, id);
		if (!regulator) return id;
		const { cell, output, xUm, yUm, enabled, fixed } = regulator;
		const result = results.get(id);
		const parts = [`regulator ${id}, ${cell} on ${output}`, `at x ${xUm} µm, y ${yUm} µm`];
		if (!enabled) parts.push('off');
		if (fixed) parts.push('fixed');
		if (result) {
			const load = formatQuantity(result.loadFraction, 'fraction', { digits: 3 });
			parts.push(`${result.state}, ${load} of its rating`);
		}
		return parts.join(', ');
	}
	if (list === 'blocks') return `block ${id} on ${findItem(floorplan, list, id)?.net ?? ''}`;
	if (list === 'feeds') return `bump ${id} of ${findItem(floorplan, list, id)?.net ?? ''}`;
	return `${list === 'keepouts' ? 'keep-out' : list.replace(/s$/, '')} ${id}`;
}

/** The selection in a sentence, for readers of the page who do not see the canvas. */
export function describeSelection(
	floorplan: Floorplan,
	selected: readonly ItemReference[],
	results: ReadonlyMap<string, RegulatorResult>
): string {
	if (selected.length === 0) return 'Nothing selected.';
	if (selected.length > 1) return `${selected.length} items selected.`;
	return `Selected: ${describeItem(floorplan, selected[0], results)}.`;
}

/** A value of the map: always in mV, to the same digits wherever it stands. */
export function milliVolts(volts: number): string {
	return formatQuantity(volts, 'V', { digits: 4, factor: 1e-3 });
}

/** A reading in words, one part each: place, value, share of the limit, nearest thing. */
export function describeReading({ xUm, yUm, value, nearest }: Reading): string[] {
	const parts = [`x ${xUm.toFixed(1)} µm, y ${yUm.toFixed(1)} µm`];
	if (value) {
		parts.push(`${value.net} ${milliVolts(value.volts)}`);
		if (value.share !== null) {
			parts.push(`${formatQuantity(value.share, 'fraction', { digits: 3 })} of the limit`);
		}
	}
	if (nearest) {
		const { id } = referenceOf(nearest.key);
		const away = nearest.distanceUm;
		parts.push(away === 0 ? `in ${id}` : `${away.toFixed(1)} µm from ${id}`);
	}
	return parts;
}
