/** The bundled solve thread: the same numbers as here, and a clear end whatever happens to it. */
import { afterEach, beforeEach, describe, expect, inject, it } from 'vitest';
import { gunzipSync } from 'node:zlib';
import { floorplanSchema, hashFloorplan, type Floorplan } from '#lib/floorplan/index.ts';
import { decodeDropMap } from '#lib/results/index.ts';
import { readConfig } from '#lib/server/config.ts';
import { JobRefused } from '#lib/server/jobs/job-kind.ts';
import type { SolveAnswer } from '#lib/server/jobs/solve-messages.ts';
import { SolveRunner } from '#lib/server/jobs/solve-runner.ts';
import { latticePlan, loadAt, regulatorAt } from '../support/plans.ts';
import { smallPlan } from '../support/people.ts';
import { solved } from '../support/solving.ts';

let runner: SolveRunner;

/** A runner with limits other than the usual. */
function runnerWith(limits: Record<string, string> = {}): SolveRunner {
	return new SolveRunner(
		readConfig({
			DATABASE_URL: 'postgres://nobody@127.0.0.1:1/none',
			MANYWEIR_SOLVE_THREAD: `${inject('workerFolder')}/solve-thread.js`,
			...limits
		})
	);
}

beforeEach(() => {
	runner = runnerWith();
});

afterEach(() => runner.stop());

interface Run {
	readonly answer: Promise<SolveAnswer>;
	/** Fulfilled with the first word of progress: the solve is under way. */
	readonly begun: Promise<string>;
	readonly abort: AbortController;
}

function run(floorplan: Floorplan, mode = 'default'): Run {
	const abort = new AbortController();
	let begin = (_phase: string) => {};
	const begun = new Promise<string>((resolve) => (begin = resolve));
	const request = { floorplan, documentHash: hashFloorplan(floorplan), mode, corner: 'nominal' };
	const answer = runner.run(request, abort.signal, (phase) => begin(phase));
	// Each test looks at the answer in its own time.
	answer.catch(() => {});
	return { answer, begun, abort };
}

/** Takes far longer than a test. */
function hugePlan(): Floorplan {
	const size = 900;
	return latticePlan(
		{ columns: size, rows: size, viaOhm: 0.01 },
		{
			regulators: [regulatorAt('r1', 'vdd', 4000, 4000)],
			blocks: [loadAt('b1', 'vdd', 2000, 2000, 0.01)]
		}
	);
}

async function refusalOf(answer: Promise<unknown>): Promise<JobRefused> {
	const error = await answer.then(
		() => null,
		(reason: unknown) => reason
	);
	if (!(error instanceof JobRefused)) throw new Error(`not refused: ${String(error)}`);
	return error;
}

describe('a solve in the thread', () => {
	it('gives the numbers that the solver gives here, for each mode of a plan', async () => {
		const plan = smallPlan();
		for (const mode of ['default', 'busy']) {
			const { file, maps } = await run(plan, mode).answer;
			const { result } = solved(plan, { mode });
			const { solver: _ours, floorplan: _name, ...numbers } = result;
			expect(file).toMatchObject(JSON.parse(JSON.stringify(numbers)) as object);
			expect(file.floorplan.sha256).toBe(hashFloorplan(plan));
			expect(maps.map(({ net }) => net)).toEqual(['vdd']);
			const map = decodeDropMap(gunzipSync(maps[0].gzip));
			expect(map?.columns).toBeGreaterThan(0);
		}
	});

	it('that has no answer says why and where, and the thread goes on', async () => {
		const plan = smallPlan();
		const island = floorplanSchema.parse({
			...plan,
			regulators: plan.regulators.map((unit) => ({ ...unit, enabled: false }))
		});
		const { failure } = await refusalOf(run(island).answer);
		expect(failure.message).toBe('The plan cannot be solved as it is drawn.');
		expect(failure.problems[0].path).toMatch(/b1|vdd/);
		expect((await run(plan).answer).file.mode).toBe('default');
	});

	it('stops at once when it is no longer wanted, and the next one runs', async () => {
		const { answer, begun, abort } = run(hugePlan());
		expect(await begun).toBe('meshing');
		abort.abort('cancelled');
		await expect(answer).rejects.toThrow('solve ended: cancelled');
		expect((await run(smallPlan()).answer).file.mode).toBe('default');
	});

	it('is not begun when it is no longer wanted beforehand', () => {
		const abort = new AbortController();
		abort.abort('cancelled');
		const request = {
			floorplan: smallPlan(),
			documentHash: '',
			mode: 'default',
			corner: 'nominal'
		};
		expect(() => runner.run(request, abort.signal, () => {})).toThrow();
	});

	it('whose thread dies fails, and the next one runs', async () => {
		// No plan: what a fault of ours would look like.
		const broken = { ...smallPlan(), nets: undefined } as unknown as Floorplan;
		await expect(run(broken).answer).rejects.toThrow();
		expect((await run(smallPlan()).answer).file.mode).toBe('default');
	});

	it.each([
		['memory', { MANYWEIR_SOLVE_MEMORY_MB: '400' }, 'needs more than the 400 MB'],
		['time', { MANYWEIR_SOLVE_SECONDS: '1' }, 'took longer than the 1 s']
	])(
		'that wants too much %s ends with that cause, and the process lives',
		async (_what, limits, words) => {
			const limited = runnerWith(limits);
			const plan = hugePlan();
			const request = {
				floorplan: plan,
				documentHash: hashFloorplan(plan),
				mode: 'default',
				corner: 'nominal'
			};
			const { signal } = new AbortController();
			const { failure } = await refusalOf(limited.run(request, signal, () => {}));
			expect(failure.message).toContain(words);
			limited.stop();
			expect((await run(smallPlan()).answer).file.mode).toBe('default');
		}
	);
});
