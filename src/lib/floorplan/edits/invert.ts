import type { Operation } from './operation.ts';

function invertOne(operation: Operation): Operation {
	switch (operation.op) {
		case 'insert':
			return { ...operation, op: 'remove' };
		case 'remove':
			return { ...operation, op: 'insert' };
		case 'change':
		case 'set':
			return { ...operation, from: operation.to, to: operation.from };
	}
}

/** Operations that undo the given ones: each inverted, in reverse order. */
export function invertOperations(operations: readonly Operation[]): Operation[] {
	return operations.map(invertOne).reverse();
}
