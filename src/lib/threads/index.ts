export { threadFor, WorkerThread } from './worker-thread.ts';
