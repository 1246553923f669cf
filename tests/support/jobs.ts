/** Work whose course a test decides: hangs, fails, ends or kills its process, as its input says. */
import { z } from 'zod';
import type { Connection } from '#lib/server/db/client.ts';
import { enqueue } from '#lib/server/jobs/enqueue.ts';
import { JobRefused, type JobKind } from '#lib/server/jobs/job-kind.ts';
import type { JobRow } from '#lib/server/jobs/job-rows.ts';
import type { World } from './people.ts';

export const COURSES = ['finish', 'hang', 'hang once', 'fail', 'refuse'] as const;
export type Course = (typeof COURSES)[number];

const inputSchema = z.object({ course: z.enum(COURSES) });
type Input = z.infer<typeof inputSchema>;

/** What was stored by which attempt of which job. */
export interface Outcome {
	readonly job: string;
	readonly attempt: number;
}

/** Makes the table that outcomes of `testKind` go to. */
export async function createOutcomes({ sql }: Connection): Promise<void> {
	await sql`create table test_outcomes (id serial primary key, job uuid not null, attempt int not null)`;
}

export async function outcomesOf({ sql }: Connection): Promise<Outcome[]> {
	const rows = await sql<{ job: string; attempt: number }[]>`
		select job, attempt from test_outcomes order by id`;
	return rows.map(({ job, attempt }) => ({ job, attempt }));
}

export function testKind({ sql }: Connection): JobKind<Input, number> {
	const untilAborted = (signal: AbortSignal) =>
		new Promise<never>((_resolve, reject) => {
			const abort = () => reject(new Error(`ended: ${String(signal.reason)}`));
			if (signal.aborted) abort();
			signal.addEventListener('abort', abort);
		});
	return {
		kind: 'test',
		input: inputSchema,
		async run({ course }, { job, signal, progress }) {
			progress('at work', 0.5);
			switch (course) {
				case 'finish':
					return job.attempt;
				case 'hang':
					return untilAborted(signal);
				case 'hang once':
					return job.attempt === 1 ? untilAborted(signal) : job.attempt;
				case 'fail':
					throw new Error('the surroundings failed');
				case 'refuse':
					throw new JobRefused({
						message: 'The input is wrong.',
						problems: [{ path: 'blocks (b1)', message: 'too heavy' }]
					});
			}
		},
		async store(_db, _input, attempt, job) {
			await sql`insert into test_outcomes (job, attempt) values (${job.id}, ${attempt})`;
		}
	};
}

let counter = 0;

/** Adds a job of the test's kind, asked for by a member of the project. */
export function addJob(
	{ db }: Connection,
	{ teamId, floorplanId, members }: World,
	course: Course,
	role: keyof World['members'] = 'placer'
): Promise<JobRow> {
	return enqueue(db, {
		kind: 'test',
		input: { course },
		dedupeKey: `test:${++counter}`,
		teamId,
		floorplanId,
		requestedBy: members[role].actor.userId
	});
}
