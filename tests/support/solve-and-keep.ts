import { gzipSync } from 'node:zlib';
import { hashFloorplan, type Floorplan } from '#lib/floorplan/index.ts';
import { buildDropMap, encodeDropMap } from '#lib/results/index.ts';
import type { Connection } from '#lib/server/db/client.ts';
import { solveKind } from '#lib/server/jobs/solve-kind.ts';
import { SolveRunner } from '#lib/server/jobs/solve-runner.ts';
import type { JobRow } from '#lib/server/jobs/job-rows.ts';
import type { World } from './people.ts';
import { solved } from './solving.ts';

/** Solves a plan here and keeps its result as the worker would; the result's id. */
export async function solveAndKeep(
	{ db, sql }: Connection,
	{ projectId, floorplanId }: Pick<World, 'projectId' | 'floorplanId'>,
	plan: Floorplan,
	conditions: { readonly mode?: string; readonly corner?: string } = {}
): Promise<string> {
	const { network, point, result } = solved(plan, conditions);
	const documentHash = hashFloorplan(plan);
	const maps = network.nets.flatMap(({ id }) => {
		const map = buildDropMap(plan, network, point, id);
		return map ? [{ net: id, gzip: gzipSync(encodeDropMap(map)) }] : [];
	});
	const { mode, corner } = point;
	const input = { projectId, floorplanId, documentHash, mode, corner };
	const file = { ...result, floorplan: { ...result.floorplan, sha256: documentHash } };
	await solveKind(new SolveRunner()).store(db, input, { file, maps }, {} as JobRow);
	const [{ id }] = await sql<{ id: string }[]>`
		select id from results where project_id = ${projectId} and document_hash = ${documentHash}
			and mode = ${mode} and corner = ${corner}`;
	return id;
}
