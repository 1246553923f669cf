import { NM_PER_UM, type Corner, type Floorplan, type Layer } from '#lib/floorplan/index.ts';
import type { Network } from '#lib/mesh/index.ts';
import type { OperatingPoint } from '#lib/solver/index.ts';
import { nodePositionUm } from './readings.ts';
import type { StrapLoad, ViaLoad } from './schema.ts';

/** Boltzmann constant, eV per K (CODATA 2018: exact 1.380649e-23 J/K over 1.602176634e-19 C). */
const BOLTZMANN_EV_PER_K = 8.617333262e-5;
const ZERO_C_IN_K = 273.15;

/**
 * What a current limit is multiplied by at another temperature: Black's equation
 * MTTF = A j^-n exp(Ea / kT) at the same life time (J. R. Black 1969); 1 for a layer that does not
 * state `emActivationEv`, `emExponent` and `emRefC`.
 */
export function blackFactor(layer: Layer, temperatureC: number): number {
	const { emActivationEv, emExponent, emRefC } = layer;
	if (emActivationEv === undefined || emExponent === undefined || emRefC === undefined) return 1;
	const inverse = 1 / (temperatureC + ZERO_C_IN_K) - 1 / (emRefC + ZERO_C_IN_K);
	return Math.exp(((emActivationEv / BOLTZMANN_EV_PER_K) * inverse) / emExponent);
}

/** The most loaded piece of every strap pattern line and every via whose metal states a limit. */
export interface MetalLoads {
	/** One entry per single strap, its worst piece; by severity. */
	readonly straps: readonly StrapLoad[];
	/** One entry per via crossing; by severity. */
	readonly vias: readonly ViaLoad[];
}

function bySeverity<T extends { loadFraction: number }>(idOf: (item: T) => string) {
	return (a: T, b: T) => {
		if (a.loadFraction !== b.loadFraction) return b.loadFraction - a.loadFraction;
		return idOf(a) < idOf(b) ? -1 : idOf(a) > idOf(b) ? 1 : 0;
	};
}

/** Loads of all straps and vias against their electromigration limits in the corner. */
export function metalLoads(
	floorplan: Floorplan,
	network: Network,
	point: OperatingPoint,
	corner: Corner
): MetalLoads {
	const { resistors, nodes } = network;
	const factors = floorplan.layers.map((layer) => blackFactor(layer, corner.temperatureC));
	const layerIndex = new Map(floorplan.layers.map((layer, index) => [layer.id, index]));
	const strapLimitA = floorplan.straps.map((strap) => {
		const layer = layerIndex.get(strap.layer) ?? -1;
		const perUm = floorplan.layers[layer]?.maxMaPerUm;
		return perUm === undefined ? null : strap.widthUm * perUm * 1e-3 * factors[layer];
	});
	// A via rule has no data of its own for Black's equation: it follows its lower layer.
	const cutLimitA = floorplan.vias.map((via) => {
		const factor = factors[layerIndex.get(via.lower) ?? -1] ?? 1;
		return via.maxMaPerCut === undefined ? null : via.maxMaPerCut * 1e-3 * factor;
	});
	const worstOfLine = new Map<string, { resistor: number; amps: number; limitA: number }>();
	const vias: ViaLoad[] = [];
	for (let r = 0; r < resistors.count; r++) {
		const from = resistors.from[r];
		const to = resistors.to[r];
		const amps = Math.abs(point.voltage[from] - point.voltage[to]) / point.resistorOhm[r];
		const source = resistors.source[r];
		// Only vias have cuts.
		if (resistors.cuts[r] === 0) {
			const limitA = strapLimitA[source];
			if (limitA === null) continue;
			const horizontal = floorplan.layers[resistors.layer[r]].direction === 'horizontal';
			const line = `${source}/${horizontal ? nodes.yNm[from] : nodes.xNm[from]}`;
			const worst = worstOfLine.get(line);
			if (worst === undefined || amps > worst.amps) {
				worstOfLine.set(line, { resistor: r, amps, limitA });
			}
			continue;
		}
		const perCut = cutLimitA[source];
		if (perCut === null) continue;
		const limitA = perCut * resistors.cuts[r];
		vias.push({
			via: floorplan.vias[source].id,
			net: network.nets[nodes.net[from]].id,
			amps,
			cuts: resistors.cuts[r],
			limitA,
			loadFraction: amps / limitA,
			atUm: nodePositionUm(network, from)
		});
	}
	const straps = [...worstOfLine.values()].map(({ resistor, amps, limitA }): StrapLoad => {
		const strap = floorplan.straps[resistors.source[resistor]];
		return {
			strap: strap.id,
			net: strap.net,
			layer: strap.layer,
			amps,
			limitA,
			loadFraction: amps / limitA,
			fromUm: nodePositionUm(network, resistors.from[resistor]),
			toUm: nodePositionUm(network, resistors.to[resistor])
		};
	});
	return {
		straps: straps.sort(bySeverity((item) => item.strap)),
		vias: vias.sort(bySeverity((item) => item.via))
	};
}

/** Middle of a strap piece, um. */
export function pieceMiddleUm({ fromUm, toUm }: StrapLoad): [number, number] {
	const middle = (a: number, b: number) => Math.round(((a + b) / 2) * NM_PER_UM) / NM_PER_UM;
	return [middle(fromUm[0], toUm[0]), middle(fromUm[1], toUm[1])];
}
