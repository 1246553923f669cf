export type { Command, CommandPermission, PageActions } from './command.ts';
export { isAvailable } from './command.ts';
export { commandById, commands } from './commands.ts';
export type { KeyPress } from './keys.ts';
export { commandOf, describeKeys, isTyping } from './keys.ts';
