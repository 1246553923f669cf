export { rateLimits, sessions, teams, users } from './teams.ts';
export { projectMembers, projects } from './projects.ts';
export { documents, floorplanEdits, floorplans } from './floorplans.ts';
export type { ResultFigures } from './jobs.ts';
export { jobs, resultMaps, results, workers } from './jobs.ts';
export { revisionFindings, revisionMoves, revisionResults, revisions } from './revisions.ts';
export { comments, threadActs, threads } from './threads.ts';
export { libraryItems } from './library.ts';
export { auditEvents } from './audit.ts';
