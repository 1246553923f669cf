/**
 * The thread in which solves run, so that the worker process keeps hearing of cancellations while
 * one is under way, and so that running out of memory ends the thread and nothing else.
 */
import { performance } from 'node:perf_hooks';
import { parentPort } from 'node:worker_threads';
import { gzipSync } from 'node:zlib';
import type { Floorplan } from '#lib/floorplan/index.ts';
import { meshFloorplan, type ModelProblem, type Network } from '#lib/mesh/index.ts';
import { buildDropMap, buildResult, encodeDropMap } from '#lib/results/index.ts';
import { createGridCache, solveOperatingPoint, type GridCache } from '#lib/solver/index.ts';
import { threadFor, type WorkerThread } from '#lib/threads/index.ts';
import type { SolveReply, SolveRequest } from './solve-messages.ts';

/** Part of the whole that is done when a phase begins. */
const PHASES = {
	mesh: { words: 'meshing', fraction: 0.05 },
	setup: { words: 'setting up', fraction: 0.2 },
	factor: { words: 'factoring', fraction: 0.3 },
	solve: { words: 'solving', fraction: 0.55 },
	proof: { words: 'proving', fraction: 0.85 },
	read: { words: 'reading off', fraction: 0.9 }
} as const;

interface MeshedPlan {
	readonly documentHash: string;
	readonly network: Network;
	readonly cache: GridCache;
	readonly meshSeconds: number;
}

/** The plan of the last solve: its other modes and corners usually follow. */
let meshed: MeshedPlan | undefined;

/** Started with the first plan that gains from it, and kept. */
let secondThread: WorkerThread | null = null;

function seconds(): number {
	return performance.now() / 1000;
}

function reply(message: SolveReply): void {
	parentPort?.postMessage(message);
}

function progress(phase: keyof typeof PHASES): void {
	const { words, fraction } = PHASES[phase];
	reply({ type: 'progress', phase: words, fraction });
}

function refuse(message: string, problems: readonly ModelProblem[]): void {
	reply({
		type: 'refused',
		failure: {
			message,
			problems: problems.map(({ path, message: text, subject, atUm }) => ({
				path,
				message: text,
				subject,
				atUm: atUm && [atUm[0], atUm[1]]
			}))
		}
	});
}

function mesh(floorplan: Floorplan, documentHash: string): MeshedPlan | null {
	if (meshed?.documentHash === documentHash) return meshed;
	// The plan before makes room for this one.
	meshed?.cache.release();
	meshed = undefined;
	progress('mesh');
	const begin = seconds();
	const result = meshFloorplan(floorplan);
	if (result.status === 'refused') {
		refuse('The plan cannot be solved as it is drawn.', result.problems);
		return null;
	}
	const { network } = result;
	secondThread ??= threadFor(Math.max(...network.nets.map(({ nodeCount }) => nodeCount)));
	meshed = {
		documentHash,
		network,
		cache: createGridCache(network, secondThread),
		meshSeconds: seconds() - begin
	};
	return meshed;
}

function solve({ floorplan, documentHash, mode, corner }: SolveRequest): void {
	const begin = seconds();
	const plan = mesh(floorplan, documentHash);
	if (!plan) return;
	const { network, cache, meshSeconds } = plan;
	const outcome = solveOperatingPoint(floorplan, network, {
		mode,
		corner,
		now: seconds,
		cache,
		onProgress: ({ phase }) => progress(phase)
	});
	if (outcome.status === 'stopped') throw new Error('the solve stopped without being asked to');
	if (outcome.status !== 'solved') {
		const what =
			outcome.status === 'unsolvable'
				? 'There is no operating point'
				: 'The solve did not converge';
		refuse(`${what} in mode ${mode}, corner ${corner}.`, outcome.problems);
		return;
	}
	progress('read');
	const file = buildResult(floorplan, network, outcome.point, {
		sha256: documentHash,
		meshSeconds,
		totalSeconds: seconds() - begin,
		peakMb: process.resourceUsage().maxRSS / 1024
	});
	const maps = network.nets.flatMap(({ id }) => {
		const map = buildDropMap(floorplan, network, outcome.point, id);
		return map ? [{ net: id, gzip: gzipSync(encodeDropMap(map)) }] : [];
	});
	reply({ type: 'solved', answer: { file, maps } });
}

parentPort?.on('message', solve);
