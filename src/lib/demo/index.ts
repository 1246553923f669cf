export { windowArea } from './feeds.ts';
export { DEMO_SEED, makeDemoFloorplan } from './floorplan.ts';
export type { DemoHistory, DemoStep } from './history.ts';
export { makeDemoHistory } from './history.ts';
export { seededRandom } from './random.ts';
