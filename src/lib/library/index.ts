import { gf180mcu } from './gf180mcu.ts';
import { sg13g2 } from './sg13g2.ts';
import { sky130 } from './sky130.ts';
import type { RailStack } from './stack.ts';

export type { RailStack } from './stack.ts';
export { gf180mcu, sg13g2, sky130 };

/** The openly licensed process kits whose published numbers ship with the product. */
export const openStacks: readonly RailStack[] = [sg13g2, sky130, gf180mcu];
