import { editAcceptedSchema, type EditAccepted } from './floorplans.ts';
import { requestJson, type Fetch } from './request.ts';
import {
	revisionDetailSchema,
	revisionFindingsSchema,
	revisionListSchema,
	type AskReview,
	type Decide,
	type Freeze,
	type Restore,
	type RevisionDetail,
	type RevisionFindings,
	type RevisionSummary
} from './revisions.ts';

/** Operations about revisions: freezing, their findings, review and decision. */
export function revisionOperations(fetcher: Fetch) {
	const revisions = (floorplanId: string) =>
		`/floorplans/${encodeURIComponent(floorplanId)}/revisions`;
	const revision = (id: string) => `/revisions/${encodeURIComponent(id)}`;
	return {
		listRevisions: async (floorplanId: string): Promise<RevisionSummary[]> =>
			(await requestJson(fetcher, 'GET', revisions(floorplanId), revisionListSchema)).revisions,
		/** The same version frozen twice answers the revision that there is. */
		freezeRevision: (floorplanId: string, freeze: Freeze): Promise<RevisionDetail> =>
			requestJson(fetcher, 'POST', revisions(floorplanId), revisionDetailSchema, freeze),
		getRevision: (id: string): Promise<RevisionDetail> =>
			requestJson(fetcher, 'GET', revision(id), revisionDetailSchema),
		/** Starts what is missing of its results anew. */
		solveRevision: (id: string): Promise<RevisionDetail> =>
			requestJson(fetcher, 'POST', `${revision(id)}/solves`, revisionDetailSchema, {}),
		getFindings: (id: string): Promise<RevisionFindings> =>
			requestJson(fetcher, 'GET', `${revision(id)}/findings`, revisionFindingsSchema),
		askReview: (id: string, ask: AskReview): Promise<RevisionDetail> =>
			requestJson(fetcher, 'POST', `${revision(id)}/review`, revisionDetailSchema, ask),
		decideRevision: (id: string, decision: Decide): Promise<RevisionDetail> =>
			requestJson(fetcher, 'POST', `${revision(id)}/decision`, revisionDetailSchema, decision),
		/** Starts the draft anew from the revision, as one edit; answers the draft's new version. */
		restoreRevision: (id: string, restore: Restore): Promise<EditAccepted> =>
			requestJson(fetcher, 'POST', `${revision(id)}/draft`, editAcceptedSchema, restore)
	};
}
