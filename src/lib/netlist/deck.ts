import type { Corner, Floorplan, Mode } from '#lib/floorplan/index.ts';
import { resistancesAt, type ModelProblem, type Network } from '#lib/mesh/index.ts';
import { loadLines } from './loads.ts';
import { nodeNames, safeIds } from './names.ts';
import { regulatorLines } from './regulators.ts';
import { senseLines } from './sense.ts';
import { SMALL_NETWORK_NODES } from './size.ts';
import type { DeckStart } from './start.ts';

export type DeckResult =
	| { readonly status: 'written'; readonly deck: string }
	| { readonly status: 'refused'; readonly problems: readonly ModelProblem[] };

/**
 * Tolerances of the simulator's own iteration. All laws but a few loads' are straight in pieces, so
 * that two steps which agree this well stand on the same pieces and the answer is as exact as the
 * linear solve; tighter ones meet the rounding noise of the steep walls and never end.
 */
const OPTIONS = '.options reltol=1e-6 abstol=1e-8 vntol=1e-7 gmin=1e-15 itl1=500 numdgt=15';

/** Volts of a feed's ideal source in a mode. */
function feedVolts(floorplan: Floorplan, netId: string, mode: Mode): number {
	const net = floorplan.nets.find((candidate) => candidate.id === netId);
	if (net === undefined || net.kind === 'ground') return 0;
	return mode.inputVolts?.[netId] ?? net.volts;
}

/**
 * Feeds: the net's ideal source, one for all of them, behind each feed's resistor; a ground feed's
 * source is node 0. Without a resistor a source of its own holds the node.
 */
function feedLines(
	floorplan: Floorplan,
	network: Network,
	mode: Mode,
	names: readonly string[]
): string[] {
	const ids = safeIds(floorplan.feeds);
	const netIds = safeIds(floorplan.nets);
	const holder = new Map<number, string>();
	const sources = floorplan.nets.flatMap((net, n) =>
		net.kind === 'input' && floorplan.feeds.some((feed) => feed.net === net.id)
			? [`vs_${netIds[n]} s_${netIds[n]} 0 ${feedVolts(floorplan, net.id, mode)}`]
			: []
	);
	const feeds = floorplan.feeds.flatMap((feed, f) => {
		const node = network.feeds.node[f];
		const comment = `* feed ${feed.id}`;
		if (node < 0) return [`${comment}: joins no strap`];
		const net = network.nodes.net[node];
		if (feed.seriesOhm > 0) {
			const source = network.nets[net].kind === 'ground' ? '0' : `s_${netIds[net]}`;
			return [comment, `rf_${ids[f]} ${source} ${names[node]} ${feed.seriesOhm}`];
		}
		const held = holder.get(node);
		if (held !== undefined) return [`${comment}: its node is already held by feed ${held}`];
		holder.set(node, feed.id);
		return [comment, `vf_${ids[f]} ${names[node]} 0 ${feedVolts(floorplan, feed.net, mode)}`];
	});
	return [...sources, ...feeds];
}

function resistorLines(network: Network, ohm: Float64Array, names: readonly string[]): string[] {
	const { count, from, to } = network.resistors;
	const lines = new Array<string>(count);
	for (let r = 0; r < count; r++) {
		lines[r] = `r${r + 1} ${names[from[r]]} ${names[to[r]]} ${ohm[r]}`;
	}
	return lines;
}

/** One line of text: what people typed may hold line breaks. */
function oneLine(text: string): string {
	return text.replace(/\s+/g, ' ').trim();
}

function headLines(floorplan: Floorplan, mode: Mode, corner: Corner): string[] {
	const nets = safeIds(floorplan.nets);
	const layers = safeIds(floorplan.layers);
	return [
		`Manyweir: ${oneLine(floorplan.name ?? 'floorplan')}, mode ${mode.id}, corner ${corner.id}`,
		'* Early estimate of static drop from a drawn grid: confirm with extracted data before manufacture.',
		'* Nodes: n_<net>_<layer>_<x nm>_<y nm>, m before a coordinate is a minus; node 0 is the ideal ground.',
		...floorplan.nets.map(
			(net, n) => `* net ${net.id} is ${nets[n]}: ${net.kind}, ${net.volts} V nominal`
		),
		...floorplan.layers.map((layer, l) => `* layer ${layer.id} is ${layers[l]}`),
		'* Regulators: br_<id> between input and output pin, its current through vr_<id>.'
	];
}

/**
 * The network in one mode and corner as an open SPICE-syntax deck that a general simulator runs
 * unchanged in batch mode. A small network starts from `start` where it is given. Refused where the
 * corner has no resistances (see `resistancesAt`).
 */
export function writeDeck(
	floorplan: Floorplan,
	network: Network,
	{
		mode,
		corner,
		start: known = null
	}: { readonly mode: Mode; readonly corner: Corner; readonly start?: DeckStart | null }
): DeckResult {
	const scaled = resistancesAt(network, floorplan, corner);
	if (scaled.status === 'refused') return scaled;
	const start = network.nodes.count <= SMALL_NETWORK_NODES ? known : null;
	const { names, comments } = nodeNames(floorplan, network);
	const loops = senseLines(floorplan, network, names, start);
	const sections = [
		headLines(floorplan, mode, corner),
		comments,
		['* Straps and vias'],
		resistorLines(network, scaled.ohm, names),
		['* Feeds'],
		feedLines(floorplan, network, mode, names),
		['* Regulators'],
		regulatorLines(floorplan, network, corner, names, loops.correctionNode, start),
		loops.lines,
		['* Loads'],
		loadLines(floorplan, network, mode, corner, names, start),
		[OPTIONS, '.op', '.end']
	];
	const deck = sections.map((lines) => lines.map((line) => `${line}\n`).join('')).join('');
	return { status: 'written', deck };
}
