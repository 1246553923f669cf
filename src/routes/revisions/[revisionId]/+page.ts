import { error } from '@sveltejs/kit';
import { ApiError, createClient } from '#lib/contracts/index.ts';
import type { PageLoad } from './$types';

// The drawing needs a browser; nothing of this page makes sense without it.
export const ssr = false;

export const load: PageLoad = async ({ data, fetch, params }) => {
	try {
		return { ...data, revision: await createClient(fetch).getRevision(params.revisionId) };
	} catch (reason) {
		if (!(reason instanceof ApiError)) throw reason;
		error(reason.problem.status, reason.message);
	}
};
