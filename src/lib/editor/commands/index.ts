export type { Command } from './commands.ts';
export { commands, isAvailable } from './commands.ts';
export type { KeyPress } from './keys.ts';
export { commandOf, describeKeys } from './keys.ts';
