import { resultFileSchema, type ResultFile } from '#lib/results/index.ts';
import { sessionSchema, type SessionAnswer } from './account.ts';
import { jobSchema, type Job } from './jobs.ts';
import {
	editAcceptedSchema,
	editsPageSchema,
	floorplanDetailSchema,
	type EditAccepted,
	type EditsPage,
	type FloorplanDetail,
	type SubmitEdit
} from './floorplans.ts';
import {
	floorplanListSchema,
	floorplanSummarySchema,
	projectListSchema,
	projectSchema,
	type FloorplanSummary,
	type Project,
	type ProjectSummary
} from './projects.ts';
import type { ProjectRole } from './roles.ts';
import { request, requestJson, type Fetch } from './request.ts';
import { revisionOperations } from './revision-client.ts';
import { solvesSchema, type Solves } from './solves.ts';
import { threadOperations } from './thread-client.ts';

/** The product's own API, one function per operation. Each throws an ApiError with the problem. */
export function createClient(fetcher: Fetch) {
	const floorplan = (id: string) => `/floorplans/${encodeURIComponent(id)}`;
	const project = (id: string) => `/projects/${encodeURIComponent(id)}`;
	return {
		...revisionOperations(fetcher),
		...threadOperations(fetcher),
		getSession: (): Promise<SessionAnswer> =>
			requestJson(fetcher, 'GET', '/session', sessionSchema),
		listProjects: async (): Promise<ProjectSummary[]> =>
			(await requestJson(fetcher, 'GET', '/projects', projectListSchema)).projects,
		getProject: (id: string): Promise<Project> =>
			requestJson(fetcher, 'GET', project(id), projectSchema),
		createProject: (name: string): Promise<Project> =>
			requestJson(fetcher, 'POST', '/projects', projectSchema, { name }),
		setMember: async (id: string, userId: string, role: ProjectRole): Promise<void> => {
			await request(fetcher, 'PUT', `${project(id)}/members/${encodeURIComponent(userId)}`, {
				role
			});
		},
		removeMember: async (id: string, userId: string): Promise<void> => {
			await request(fetcher, 'DELETE', `${project(id)}/members/${encodeURIComponent(userId)}`);
		},
		listFloorplans: async (id: string): Promise<FloorplanSummary[]> =>
			(await requestJson(fetcher, 'GET', `${project(id)}/floorplans`, floorplanListSchema))
				.floorplans,
		createFloorplan: (id: string, name: string, document?: unknown): Promise<FloorplanSummary> =>
			requestJson(fetcher, 'POST', `${project(id)}/floorplans`, floorplanSummarySchema, {
				name,
				document
			}),
		getFloorplan: (id: string): Promise<FloorplanDetail> =>
			requestJson(fetcher, 'GET', floorplan(id), floorplanDetailSchema),
		submitEdit: (id: string, edit: SubmitEdit): Promise<EditAccepted> =>
			requestJson(fetcher, 'POST', `${floorplan(id)}/edits`, editAcceptedSchema, edit),
		listEdits: (id: string, after: number): Promise<EditsPage> =>
			requestJson(fetcher, 'GET', `${floorplan(id)}/edits?after=${after}`, editsPageSchema),
		getSolves: (id: string): Promise<Solves> =>
			requestJson(fetcher, 'GET', `${floorplan(id)}/solves`, solvesSchema),
		requestSolves: (id: string, wanted: { mode?: string; corner?: string }): Promise<Solves> =>
			requestJson(fetcher, 'POST', `${floorplan(id)}/solves`, solvesSchema, wanted),
		getJob: (id: string): Promise<Job> =>
			requestJson(fetcher, 'GET', `/jobs/${encodeURIComponent(id)}`, jobSchema),
		cancelJob: (id: string): Promise<Job> =>
			requestJson(fetcher, 'POST', `/jobs/${encodeURIComponent(id)}/cancel`, jobSchema),
		getResult: (id: string): Promise<ResultFile> =>
			requestJson(fetcher, 'GET', `/results/${encodeURIComponent(id)}`, resultFileSchema),
		getMap: async (resultId: string, net: string): Promise<Uint8Array> => {
			const path = `/results/${encodeURIComponent(resultId)}/maps/${encodeURIComponent(net)}`;
			return new Uint8Array(await (await request(fetcher, 'GET', path)).arrayBuffer());
		}
	};
}
export type ApiClient = ReturnType<typeof createClient>;
