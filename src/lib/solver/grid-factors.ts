import type { Network } from '#lib/mesh/index.ts';
import {
	analyse,
	assembleLaplacian,
	factorise,
	orderNestedDissection,
	planAssembly,
	createPorts,
	releaseFactor,
	SECOND_THREAD_ROWS,
	solveWith,
	type AssemblyPlan,
	type CholeskyFactor,
	type SecondThread,
	type SymbolicFactor
} from '#lib/sparse/index.ts';
import { heldNodes, type Circuit } from './circuit.ts';
import { gather } from './gather.ts';

/** The unknown voltages of one net. Held nodes are none: their columns go to the right-hand side. */
interface NetPattern {
	/** Free node -> node of the network. */
	readonly node: Int32Array;
	/** Resistors between two free nodes, in the order of the plan's edges. */
	readonly inner: Int32Array;
	/** Resistors from a free node to a held one, and that free node. */
	readonly border: Int32Array;
	readonly borderFree: Int32Array;
	readonly plan: AssemblyPlan;
	/** Order and pattern of the factor, made with the first factor. */
	symbolic: SymbolicFactor | null;
}

/** What depends on the network alone: analyses are kept here for every mode and corner. */
export interface GridPattern {
	readonly network: Network;
	readonly nets: readonly NetPattern[];
	/** Node of the network -> free node of its net, -1 where held. */
	readonly freeOf: Int32Array;
	/** Connected part of every node: two nodes with one number are joined by resistors. */
	readonly part: Int32Array;
}

/** One column of a net's inverse, read at nodes of the network. */
export interface PortColumn {
	at(node: number): number;
}

/** The factors of one corner, shared by its modes. */
export interface GridFactors {
	readonly part: Int32Array;
	/**
	 * Writes the voltages of one net under the currents `right` (per node of the network) into
	 * `answer`; held nodes get 0, other nets are left alone.
	 */
	solve(net: number, right: Float64Array, answer: Float64Array): void;
	/** The net's answer to 1 A at a node. Kept, at the net's ports only. */
	column(net: number, node: number): PortColumn;
	/** Gives the factors' memory back: nothing of them may be used any more. */
	release(): void;
}

export type FactorOutcome =
	| { readonly status: 'factored'; readonly grid: GridFactors }
	/** A part of a net that nothing ties to a source, at one of its nodes. */
	| { readonly status: 'floating'; readonly node: number }
	/** The factor of a net would not fit into memory. */
	| {
			readonly status: 'too-large';
			readonly net: number;
			readonly bytes: number;
			readonly limitBytes: number;
	  };

/** Connected parts by union-find with path halving. */
function connectedParts(network: Network): Int32Array {
	const part = new Int32Array(network.nodes.count);
	for (let node = 0; node < part.length; node++) part[node] = node;
	function root(node: number): number {
		while (part[node] !== node) {
			part[node] = part[part[node]];
			node = part[node];
		}
		return node;
	}
	const { count, from, to } = network.resistors;
	for (let r = 0; r < count; r++) {
		const a = root(from[r]);
		const b = root(to[r]);
		if (a !== b) part[Math.max(a, b)] = Math.min(a, b);
	}
	return part.map((_, node) => root(node));
}

/** Resistors of each net with so many held ends. */
function resistorsByNet(
	{ nets, nodes, resistors }: Network,
	held: Uint8Array,
	heldEnds: number
): Int32Array[] {
	const { count, from, to } = resistors;
	const counts = new Int32Array(nets.length);
	for (let r = 0; r < count; r++) {
		if (held[from[r]] + held[to[r]] === heldEnds) counts[nodes.net[from[r]]]++;
	}
	const lists = Array.from(counts, (length) => new Int32Array(length));
	counts.fill(0);
	for (let r = 0; r < count; r++) {
		const net = nodes.net[from[r]];
		if (held[from[r]] + held[to[r]] === heldEnds) lists[net][counts[net]++] = r;
	}
	return lists;
}

/** The patterns of all nets: what `factorGrid` needs for any mode and corner. */
export function gridPattern(network: Network): GridPattern {
	const { nodes, resistors } = network;
	const held = heldNodes(network);
	const freeOf = new Int32Array(nodes.count).fill(-1);
	const freeNodes = network.nets.map(({ firstNode, nodeCount }) => {
		const free = new Int32Array(nodeCount);
		let count = 0;
		for (let node = firstNode; node < firstNode + nodeCount; node++) {
			if (held[node] === 1) continue;
			freeOf[node] = count;
			free[count++] = node;
		}
		return free.slice(0, count);
	});
	const inner = resistorsByNet(network, held, 0);
	const border = resistorsByNet(network, held, 1);
	const nets = network.nets.map((_, net): NetPattern => ({
		node: freeNodes[net],
		inner: inner[net],
		border: border[net],
		borderFree: border[net].map((r) =>
			Math.max(freeOf[resistors.from[r]], freeOf[resistors.to[r]])
		),
		plan: planAssembly(
			freeNodes[net].length,
			inner[net].map((r) => freeOf[resistors.from[r]]),
			inner[net].map((r) => freeOf[resistors.to[r]])
		),
		symbolic: null
	}));
	return { network, nets, freeOf, part: connectedParts(network) };
}

/**
 * What ties every node to a source, S: feeds behind a resistance, and 1 / outputOhm of every enabled
 * regulator at its output, as if all were regulating.
 */
function sourceTies(circuit: Circuit): Float64Array {
	const { feeds, regulators } = circuit;
	const ties = new Float64Array(circuit.network.nodes.count);
	for (let f = 0; f < feeds.count; f++) {
		if (feeds.seriesOhm[f] > 0) ties[feeds.node[f]] += 1 / feeds.seriesOhm[f];
	}
	for (let k = 0; k < regulators.count; k++) {
		ties[regulators.outputNode[k]] += 1 / regulators.outputOhm[k];
	}
	return ties;
}

/** Factors every net of a corner; enabled regulators count as regulating (see `createPortSolver`). */
export function factorGrid(
	pattern: GridPattern,
	circuit: Circuit,
	secondThread: SecondThread | null
): FactorOutcome {
	const { network, freeOf, part } = pattern;
	const ties = sourceTies(circuit);
	const factors: (CholeskyFactor | null)[] = [];
	for (const [index, net] of pattern.nets.entries()) {
		if (net.node.length === 0) {
			factors.push(null);
			continue;
		}
		const conductance = new Float64Array(net.inner.length);
		for (let e = 0; e < conductance.length; e++) conductance[e] = 1 / circuit.ohm[net.inner[e]];
		const tie = gather(ties, net.node);
		net.border.forEach((r, e) => (tie[net.borderFree[e]] += 1 / circuit.ohm[r]));
		const matrix = assembleLaplacian(net.plan, conductance, tie);
		if (net.symbolic === null) {
			const x = gather(network.nodes.xNm, net.node);
			const y = gather(network.nodes.yNm, net.node);
			net.symbolic = analyse(matrix, orderNestedDissection(matrix, x, y));
		}
		const outcome = factorise(net.symbolic, matrix, {
			secondThread: matrix.n >= SECOND_THREAD_ROWS ? secondThread : null
		});
		if (outcome.status === 'too-large') {
			return { ...outcome, net: index };
		}
		if (outcome.status === 'not-positive-definite') {
			return { status: 'floating', node: net.node[outcome.row] };
		}
		factors.push(outcome.factor);
	}
	return { status: 'factored', grid: gridOf(pattern, factors, portNodes(circuit), freeOf, part) };
}

/** Nodes at which columns are read: pins of the enabled regulators and points of the loops. */
function portNodes(circuit: Circuit): number[][] {
	const { network, regulators, senses } = circuit;
	const ports = network.nets.map(() => new Set<number>());
	const add = (node: number) => {
		if (node >= 0) ports[network.nodes.net[node]].add(node);
	};
	regulators.outputNode.forEach(add);
	regulators.inputNode.forEach(add);
	for (const sense of senses) sense.node.forEach(add);
	return ports.map((nodes) => [...nodes]);
}

/** Volts at one node of a net for 1 A at another, both ports; 0 where one is held. */
type PortAnswers = (node: number, port: number) => number;

function answersAt(
	factor: CholeskyFactor | null,
	ports: readonly number[],
	freeOf: Int32Array
): PortAnswers {
	const free = ports.filter((node) => freeOf[node] >= 0);
	if (factor === null || free.length === 0) return () => 0;
	const indexOf = new Map(free.map((node, index) => [node, index]));
	const matrix = createPorts(
		factor,
		free.map((node) => freeOf[node])
	);
	return (node, port) => {
		const a = indexOf.get(node);
		const b = indexOf.get(port);
		return a === undefined || b === undefined ? 0 : matrix.at(a, b);
	};
}

function gridOf(
	pattern: GridPattern,
	factors: readonly (CholeskyFactor | null)[],
	ports: readonly number[][],
	freeOf: Int32Array,
	part: Int32Array
): GridFactors {
	const columns = new Map<number, PortColumn>();
	const portAnswers: (PortAnswers | undefined)[] = [];
	const work = pattern.nets.map((net) => ({
		right: new Float64Array(net.node.length),
		answer: new Float64Array(net.node.length)
	}));

	function solve(net: number, right: Float64Array, answer: Float64Array): void {
		const { firstNode, nodeCount } = pattern.network.nets[net];
		answer.fill(0, firstNode, firstNode + nodeCount);
		const factor = factors[net];
		if (factor === null) return;
		const { node } = pattern.nets[net];
		const local = work[net];
		let isNeeded = false;
		for (let i = 0; i < node.length; i++) {
			local.right[i] = right[node[i]];
			isNeeded ||= local.right[i] !== 0;
		}
		if (!isNeeded) return;
		solveWith(factor, local.right, local.answer);
		for (let i = 0; i < node.length; i++) answer[node[i]] = local.answer[i];
	}

	function column(net: number, node: number): PortColumn {
		const kept = columns.get(node);
		if (kept !== undefined) return kept;
		const answers = (portAnswers[net] ??= answersAt(factors[net], ports[net], freeOf));
		const made: PortColumn = { at: (port) => answers(node, port) };
		columns.set(node, made);
		return made;
	}

	function release(): void {
		for (const factor of factors) if (factor !== null) releaseFactor(factor);
	}

	return { part, solve, column, release };
}
