import type { Finding, FindingKind, NetResult, ResultFile } from '#lib/results/index.ts';
import { formatQuantity } from '#lib/units/index.ts';

/** Volts of drops and margins: always in mV, so that columns and sentences compare. */
export function milli(value: number): string {
	return formatQuantity(value, 'V', { digits: 3, factor: 1e-3 });
}

export function marginWords(marginV: number): string {
	return marginV < 0 ? `${milli(-marginV)} over` : `${milli(marginV)} left`;
}

/** A net that loads stand on, with how it stands to its limits. */
export interface RailReading {
	readonly net: NetResult;
	/** The limit at the net's worst spot, or null without one. */
	readonly limitV: number | null;
	/** The least margin of any block or spot of the net; negative where a limit is broken. */
	readonly leastMarginV: number | null;
}

/** The regulated nets and whatever else has a limit, in the order of the file. */
export function readRails(result: ResultFile): RailReading[] {
	return result.nets.flatMap((net) => {
		const places = [...result.spots, ...result.blocks].filter((place) => place.net === net.id);
		const margins = places.flatMap(({ marginV }) => marginV ?? []);
		// Spots come by severity; a net without one still has the limits of its blocks.
		const limit = places.find(({ limitV }) => limitV !== null)?.limitV;
		if (net.kind !== 'regulated' && margins.length === 0) return [];
		return {
			net,
			limitV: limit ?? null,
			leastMarginV: margins.length > 0 ? Math.min(...margins) : null
		};
	});
}

const KIND_WORDS: Readonly<Record<FindingKind, string>> = {
	drop: 'Drop over its limit',
	rise: 'Rise over its limit',
	collapsed: 'Collapsed blocks',
	'regulator-load': 'Regulators over their load limit',
	'below-min-current': 'Regulators below their stable minimum',
	headroom: 'Headroom below its limit',
	'strap-load': 'Straps over their current limit',
	'via-load': 'Vias over their current limit',
	'feed-load': 'Bumps over their current limit',
	'sharing-spread': 'Sharing spread over its limit',
	placement: 'Regulators where they may not stand',
	short: 'Nets that touch'
};

export interface FindingGroup {
	readonly kind: FindingKind;
	readonly title: string;
	readonly findings: readonly Finding[];
}

/** Findings by kind, in the order in which the kinds first occur. */
export function groupFindings(findings: readonly Finding[]): FindingGroup[] {
	const groups = new Map<FindingKind, Finding[]>();
	for (const finding of findings) {
		const group = groups.get(finding.kind);
		if (group) group.push(finding);
		else groups.set(finding.kind, [finding]);
	}
	return [...groups].map(([kind, list]) => ({ kind, title: KIND_WORDS[kind], findings: list }));
}

/** The answer in two sentences: the same facts as the map's. */
export function summarise(result: ResultFile): string {
	const [worst] = readRails(result)
		.filter(({ net }) => net.kind === 'regulated')
		.sort((a, b) => b.net.worstDropV - a.net.worstDropV);
	const count = result.findings.length;
	const findings =
		count === 0 ? 'Every limit is kept.' : `${count} ${count === 1 ? 'finding' : 'findings'}.`;
	if (!worst) return findings;
	const { xUm, yUm, block } = worst.net.worst;
	const place = `x ${Math.round(xUm)} µm, y ${Math.round(yUm)} µm`;
	return `The largest drop is ${milli(worst.net.worstDropV)}, on ${worst.net.id} ${
		block === null ? `at ${place}` : `in block ${block} (${place})`
	}. ${findings}`;
}
