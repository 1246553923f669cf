export { writeDeck } from './deck.ts';
export type { DeckResult } from './deck.ts';
export { nodeNames } from './names.ts';
export type { DeckStart } from './start.ts';
