import { requestJson, type Fetch } from './request.ts';
import { threadListSchema, threadSchema, type OpenThread, type Thread } from './threads.ts';

/** What threads are about: the draft of a floorplan, or a revision. */
export type ThreadScope = { readonly floorplanId: string } | { readonly revisionId: string };

function threadsOf(scope: ThreadScope): string {
	return 'revisionId' in scope
		? `/revisions/${encodeURIComponent(scope.revisionId)}/threads`
		: `/floorplans/${encodeURIComponent(scope.floorplanId)}/threads`;
}

/** Operations about threads; each that changes one answers the whole thread. */
export function threadOperations(fetcher: Fetch) {
	const thread = (id: string) => `/threads/${encodeURIComponent(id)}`;
	return {
		listThreads: async (scope: ThreadScope): Promise<Thread[]> =>
			(await requestJson(fetcher, 'GET', threadsOf(scope), threadListSchema)).threads,
		openThread: (scope: ThreadScope, opening: OpenThread): Promise<Thread> =>
			requestJson(fetcher, 'POST', threadsOf(scope), threadSchema, opening),
		addComment: (id: string, text: string): Promise<Thread> =>
			requestJson(fetcher, 'POST', `${thread(id)}/comments`, threadSchema, { text }),
		/** One's own only; the comment's place stays. */
		deleteComment: (id: string, commentId: string): Promise<Thread> =>
			requestJson(
				fetcher,
				'DELETE',
				`${thread(id)}/comments/${encodeURIComponent(commentId)}`,
				threadSchema
			),
		resolveThread: (id: string): Promise<Thread> =>
			requestJson(fetcher, 'POST', `${thread(id)}/resolve`, threadSchema, {}),
		reopenThread: (id: string): Promise<Thread> =>
			requestJson(fetcher, 'POST', `${thread(id)}/reopen`, threadSchema, {})
	};
}
