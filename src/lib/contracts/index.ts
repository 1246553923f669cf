export type { Action, ProjectRole, Standing } from './roles.ts';
export { may, PERMISSIONS, PROJECT_ROLES } from './roles.ts';
export type { ProblemDocument } from './problem.ts';
export { problemSchema } from './problem.ts';
export type { Job, JobFailure, JobState } from './jobs.ts';
export { isFinished, JOB_STATES, jobSchema } from './jobs.ts';
export type { FloorplanSummary, Member, Project, ProjectSummary } from './projects.ts';
export {
	addDemoSchema,
	createFloorplanSchema,
	createProjectSchema,
	floorplanListSchema,
	floorplanSummarySchema,
	projectListSchema,
	projectSchema,
	setMemberSchema
} from './projects.ts';
export type {
	EditAccepted,
	EditConflict,
	EditsPage,
	FloorplanDetail,
	RecordedEdit,
	SubmitEdit
} from './floorplans.ts';
export {
	conflictSchema,
	editAcceptedSchema,
	editsPageSchema,
	floorplanDetailSchema,
	submitEditSchema
} from './floorplans.ts';
export type { ResultSummary, Solves } from './solves.ts';
export { requestSolvesSchema, solvesSchema } from './solves.ts';
export type { FloorplanEvent } from './events.ts';
export { floorplanEventSchema } from './events.ts';
export type { SessionAnswer, SignedInUser } from './account.ts';
export {
	changePasswordSchema,
	emailSchema,
	newPasswordSchema,
	sessionSchema,
	signInSchema,
	signUpSchema
} from './account.ts';
export type { ApiClient } from './client.ts';
export type { ThreadScope } from './thread-client.ts';
export { createClient } from './client.ts';
export { ApiError } from './request.ts';
export type {
	AskReview,
	Blocker,
	Decide,
	FindingStatus,
	Freeze,
	PersonName,
	PlanState,
	Restore,
	RevisionDetail,
	RevisionFinding,
	RevisionFindings,
	RevisionMove,
	RevisionMoveRecord,
	RevisionResult,
	RevisionState,
	RevisionSummary
} from './revisions.ts';
export {
	askReviewSchema,
	canMove,
	decideSchema,
	FINDING_STATUSES,
	freezeSchema,
	moveBetween,
	PLAN_STATES,
	REVISION_MOVES,
	REVISION_STATES,
	restoreSchema,
	revisionDetailSchema,
	revisionFindingsSchema,
	revisionListSchema,
	revisionSummarySchema
} from './revisions.ts';
export type { AnchorInput, OpenThread, Thread, ThreadAnchor, ThreadComment } from './threads.ts';
export { addCommentSchema, openThreadSchema, threadListSchema, threadSchema } from './threads.ts';
