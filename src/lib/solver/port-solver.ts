import { LuDecomposition, Matrix } from 'ml-matrix';
import type { Circuit } from './circuit.ts';
import { LOOP_HOLDING } from './evaluation.ts';
import type { GridFactors, PortColumn } from './grid-factors.ts';
import { isFlat, PIECE_DROPOUT, PIECE_REGULATING, PIECE_STARVED } from './regulator-law.ts';

/** A step of all unknowns. */
export interface Step {
	/** Per node, V; 0 at held nodes. */
	readonly voltage: Float64Array;
	/** Per sense loop, V. */
	readonly correction: Float64Array;
}

/** The linear equations of one set of pieces, loads left out, ready for any right-hand side. */
export interface PortSolver {
	/**
	 * Solves for the step that takes `mismatchA` (per node, A) and `senseV` (per loop: what the mean
	 * has to rise, or the correction itself for a loop that does not hold) to zero.
	 */
	solve(mismatchA: Float64Array, senseV: Float64Array): Step;
	/** Loops that no unit follows: their correction steps, their mean cannot. */
	readonly powerless: readonly boolean[];
}

/**
 * Slopes of every unit on its piece. With g = 1 / outputOhm its current changes by
 *
 *   follow g (dv(reference) + du - dv(output)) + through (dv(input) - dv(output))
 */
interface Slopes {
	/** 1 / outputOhm, S. */
	readonly g: Float64Array;
	/** 1 on the regulating piece, the leak on the limited and idle ones, else 0. */
	readonly follow: Float64Array;
	/** 1 / onOhm of a unit fully on, S; the leak times it for a starved one, else 0. */
	readonly through: Float64Array;
}

function slopesOf(circuit: Circuit, piece: Uint8Array, leak: Float64Array): Slopes {
	const { regulators: units } = circuit;
	return {
		g: units.outputOhm.map((ohm) => 1 / ohm),
		follow: leak.map((value, k) => {
			if (piece[k] === PIECE_REGULATING) return 1;
			return isFlat(piece[k]) && piece[k] !== PIECE_STARVED ? value : 0;
		}),
		through: leak.map((value, k) => {
			if (piece[k] === PIECE_DROPOUT) return 1 / units.onOhm[k];
			return piece[k] === PIECE_STARVED ? value / units.onOhm[k] : 0;
		})
	};
}

/**
 * The regulators as a small-rank change of the kept factors. The factor of a regulated net holds
 * the slope g = 1 / outputOhm of each enabled unit, so a regulating unit needs nothing; every other
 * unit is one unknown z, its current on top of that slope's (z = dI + g dv(output)), and every loop
 * one unknown u. With Z the factor's answers at the ports these equations are dense and small:
 *
 *   dv(output) = y + Z z + q u
 *   z = (1 - follow) g dv(output) + follow g (dv(reference) + u) + through (dv(input) - dv(output))
 *   sum of weight dv(point) = error, for a loop that holds
 *
 * where y answers the right-hand side and q one volt more on every regulating set point. Ground
 * comes first (only loads and quiescent currents flow into it), then the regulated nets, then the
 * input nets, which give what the units take.
 *
 * @param piece per unit, see `regulator-law.ts`
 * @param leak per unit, the slope of its flat pieces as a fraction of the regulating slope
 * @param loop per sense loop, `LOOP_HOLDING` or the end at which it stands
 * @returns null where these equations are singular
 */
export function createPortSolver(
	circuit: Circuit,
	grid: GridFactors,
	piece: Uint8Array,
	leak: Float64Array,
	loop: Int8Array
): PortSolver | null {
	const { regulators: units, senses, network } = circuit;
	const count = network.nodes.count;
	const netOfNode = network.nodes.net;
	const { g, follow, through } = slopesOf(circuit, piece, leak);
	const netsOf = (kind: 'input' | 'regulated' | 'ground') =>
		network.nets.flatMap((net, index) => (net.kind === kind ? [index] : []));
	const groundNets = netsOf('ground');
	const regulatedNets = netsOf('regulated');
	const inputNets = netsOf('input');

	// Units with an unknown z, their slot in the small system, and their columns of Z.
	const changed: number[] = [];
	for (let k = 0; k < units.count; k++) if (follow[k] !== 1) changed.push(k);
	const slotOf = new Int32Array(units.count).fill(-1);
	changed.forEach((k, slot) => (slotOf[k] = slot));
	const outputColumn = changed.map((k) => grid.column(units.net[k], units.outputNode[k]));
	const inputColumn = changed.map((k): PortColumn | null =>
		through[k] > 0 ? grid.column(netOfNode[units.inputNode[k]], units.inputNode[k]) : null
	);

	// q of every loop: the net's answer to one volt more on each of its regulating set points.
	const lift = senses.map((sense, s) => {
		const right = new Float64Array(count);
		for (let k = 0; k < units.count; k++) {
			if (units.sense[k] === s && follow[k] === 1) right[units.outputNode[k]] += g[k];
		}
		const answer = new Float64Array(count);
		grid.solve(sense.net, right, answer);
		return answer;
	});
	/** Nets with units that follow their set point by a leak: their loops are never powerless. */
	const leaking = new Set(changed.filter((k) => follow[k] > 0).map((k) => units.net[k]));
	const powerless = senses.map((sense, s) => {
		let followed = 0;
		sense.node.forEach((node, point) => (followed += sense.weight[point] * lift[s][node]));
		return !(followed > 1e-9) && !leaking.has(sense.net);
	});
	const holding = senses.map((_, s) => loop[s] === LOOP_HOLDING && !powerless[s]);

	/** Units that take their current from one input net. */
	const unitsByInput = new Map<number, number[]>();
	for (let k = 0; k < units.count; k++) {
		if (units.inputNode[k] < 0) continue;
		const net = netOfNode[units.inputNode[k]];
		const sharing = unitsByInput.get(net);
		if (sharing === undefined) unitsByInput.set(net, [k]);
		else sharing.push(k);
	}
	const sharingInput = (k: number) => unitsByInput.get(netOfNode[units.inputNode[k]]) ?? [];

	const order = changed.length + senses.length;
	const uSlot = (s: number) => changed.length + s;
	/** Adds `scale` times the coefficients of dv(node) on a regulated net to a row. */
	function addVoltage(row: Float64Array, net: number, node: number, scale: number): void {
		for (let slot = 0; slot < changed.length; slot++) {
			if (units.net[changed[slot]] === net) row[slot] += scale * outputColumn[slot].at(node);
		}
		senses.forEach((sense, s) => {
			if (sense.net === net) row[uSlot(s)] += scale * lift[s][node];
		});
	}
	/** The same for the current of unit k: z - g dv(output), or g (u - dv(output)) for a regulating one. */
	function addCurrent(row: Float64Array, k: number, scale: number): void {
		addVoltage(row, units.net[k], units.outputNode[k], -scale * g[k]);
		if (slotOf[k] >= 0) row[slotOf[k]] += scale;
		else if (units.sense[k] >= 0) row[uSlot(units.sense[k])] += scale * g[k];
	}
	const rows: Float64Array[] = [];
	changed.forEach((k, slot) => {
		const row = new Float64Array(order);
		row[slot] = 1;
		const ownSlope = (1 - follow[k]) * g[k] - through[k];
		addVoltage(row, units.net[k], units.outputNode[k], -ownSlope);
		if (units.sense[k] >= 0) row[uSlot(units.sense[k])] -= follow[k] * g[k];
		const column = inputColumn[slot];
		if (column !== null) {
			for (const m of sharingInput(k)) {
				addCurrent(row, m, through[k] * column.at(units.inputNode[m]));
			}
		}
		rows.push(row);
	});
	senses.forEach((sense, s) => {
		const row = new Float64Array(order);
		if (holding[s]) {
			sense.node.forEach((node, point) => addVoltage(row, sense.net, node, sense.weight[point]));
		} else {
			row[uSlot(s)] = 1;
		}
		rows.push(row);
	});
	const lu = order === 0 ? null : new LuDecomposition(new Matrix(rows.map((row) => [...row])));
	if (lu !== null && lu.isSingular()) return null;

	/** Right-hand sides of the small equations, from y (in `answered` on the regulated nets). */
	function smallRight(
		mismatchA: Float64Array,
		senseV: Float64Array,
		answered: Float64Array,
		reference: (k: number) => number
	): Float64Array {
		const small = new Float64Array(order);
		const inputAnswer = new Float64Array(count);
		const solvedInputs = new Set<number>();
		changed.forEach((k, slot) => {
			const out = answered[units.outputNode[k]];
			small[slot] = ((1 - follow[k]) * g[k] - through[k]) * out + follow[k] * g[k] * reference(k);
			const column = inputColumn[slot];
			if (column === null) return;
			const net = netOfNode[units.inputNode[k]];
			if (!solvedInputs.has(net)) {
				solvedInputs.add(net);
				grid.solve(net, mismatchA, inputAnswer);
			}
			let input = inputAnswer[units.inputNode[k]];
			for (const m of sharingInput(k)) {
				const ground = slotOf[m] < 0 ? reference(m) : 0;
				input -= column.at(units.inputNode[m]) * g[m] * (ground - answered[units.outputNode[m]]);
			}
			small[slot] += through[k] * input;
		});
		senses.forEach((sense, s) => {
			small[uSlot(s)] = senseV[s];
			if (!holding[s]) return;
			sense.node.forEach((node, point) => {
				const ground = sense.groundNode[point];
				const seen = answered[node] - (ground < 0 ? 0 : answered[ground]);
				small[uSlot(s)] -= sense.weight[point] * seen;
			});
		});
		return small;
	}

	function solve(mismatchA: Float64Array, senseV: Float64Array): Step {
		const voltage = new Float64Array(count);
		const correction = new Float64Array(senses.length);
		for (const net of groundNets) grid.solve(net, mismatchA, voltage);
		const reference = (k: number) =>
			units.referenceNode[k] < 0 ? 0 : voltage[units.referenceNode[k]];
		const right = Float64Array.from(mismatchA);
		for (let k = 0; k < units.count; k++) {
			if (slotOf[k] < 0) right[units.outputNode[k]] += g[k] * reference(k);
		}
		// y, kept in `voltage` until z and u are known.
		for (const net of regulatedNets) grid.solve(net, right, voltage);
		let z: readonly number[] = [];
		if (lu !== null) {
			const small = smallRight(mismatchA, senseV, voltage, reference);
			z = lu.solve(Matrix.columnVector(small)).to1DArray();
			senses.forEach((_, s) => (correction[s] = z[uSlot(s)]));
			const touched = new Set(changed.map((k) => units.net[k]));
			for (const sense of senses) touched.add(sense.net);
			for (let k = 0; k < units.count; k++) {
				if (slotOf[k] >= 0) right[units.outputNode[k]] += z[slotOf[k]];
				else if (units.sense[k] >= 0) {
					right[units.outputNode[k]] += g[k] * correction[units.sense[k]];
				}
			}
			for (const net of touched) grid.solve(net, right, voltage);
		}
		for (let k = 0; k < units.count; k++) {
			if (units.inputNode[k] < 0) continue;
			const out = voltage[units.outputNode[k]];
			const shift = units.sense[k] < 0 ? 0 : correction[units.sense[k]];
			const extra = slotOf[k] >= 0 ? z[slotOf[k]] : g[k] * (reference(k) + shift);
			right[units.inputNode[k]] -= extra - g[k] * out;
		}
		for (const net of inputNets) grid.solve(net, right, voltage);
		return { voltage, correction };
	}

	return { solve, powerless };
}
