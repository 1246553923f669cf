import type { JobFailure } from '#lib/contracts/jobs.ts';
import type { Floorplan } from '#lib/floorplan/index.ts';
import type { ResultFile } from '#lib/results/index.ts';

/** What the worker asks of the solve thread. One solve runs at a time. */
export interface SolveRequest {
	readonly floorplan: Floorplan;
	readonly documentHash: string;
	readonly mode: string;
	readonly corner: string;
}

export interface SolveAnswer {
	readonly file: ResultFile;
	/** Drop maps by net, as `encodeDropMap` writes them, compressed with gzip. */
	readonly maps: readonly { readonly net: string; readonly gzip: Uint8Array }[];
}

/** What the thread says: progress until the last word. */
export type SolveReply =
	| { readonly type: 'progress'; readonly phase: string; readonly fraction: number }
	| { readonly type: 'solved'; readonly answer: SolveAnswer }
	| { readonly type: 'refused'; readonly failure: JobFailure };
