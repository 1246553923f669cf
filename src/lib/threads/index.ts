export { WorkerThread } from './worker-thread.ts';
