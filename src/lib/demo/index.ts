export { DEMO_SEED, makeDemoFloorplan } from './floorplan.ts';
export { seededRandom } from './random.ts';
