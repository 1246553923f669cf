import { ApiError, type ApiClient } from '#lib/contracts/index.ts';
import type { EditsAnswer, SubmitAnswer, Transport, Unreachable } from '#lib/editor/sync/index.ts';

/** A request without an answer for this long counts as unreachable, ms. */
export const REQUEST_TIMEOUT_MS = 20_000;

function unreachable(error: unknown): Unreachable {
	if (error instanceof ApiError) {
		const { status, detail } = error.problem;
		return { status: 'unreachable', reason: status === 401 ? 'Sign in again to save.' : detail };
	}
	return { status: 'unreachable', reason: 'No connection to the server.' };
}

/** Whether the answer may be another one later: no connection, not signed in, overload, a fault. */
function mayChange(error: unknown): boolean {
	if (!(error instanceof ApiError)) return true;
	const { status } = error.problem;
	return status === 401 || status === 408 || status === 429 || status >= 500;
}

/** The way of a floorplan's edits to the server, over the product's API. */
export function floorplanTransport(client: ApiClient, floorplanId: string): Transport {
	return {
		async submit(edit): Promise<SubmitAnswer> {
			try {
				const { version } = await client.submitEdit(floorplanId, edit);
				return { status: 'accepted', version };
			} catch (error) {
				if (mayChange(error) || !(error instanceof ApiError)) return unreachable(error);
				if (error.problem.status === 409) return { status: 'conflict' };
				return {
					status: 'refused',
					reason: error.problem.detail,
					problems: error.problem.errors ?? []
				};
			}
		},
		async editsAfter(version): Promise<EditsAnswer> {
			try {
				const { edits, hasMore } = await client.listEdits(floorplanId, version);
				return { status: 'edits', edits, hasMore };
			} catch (error) {
				if (mayChange(error) || !(error instanceof ApiError)) return unreachable(error);
				return { status: 'refused', reason: error.problem.detail };
			}
		}
	};
}
