import { describe, expect, it } from 'vitest';
import { EditorDriver, smallPlan } from '../../../../tests/support/editor-driver.ts';
import { commandOf, commands, describeKeys, isTyping, type KeyPress } from './index.ts';

const press = (changes: Partial<KeyPress>): KeyPress => ({
	key: '',
	code: '',
	ctrlKey: false,
	metaKey: false,
	shiftKey: false,
	altKey: false,
	...changes
});

/**
 * Keys that belong to the browser: new, closed and reopened tabs and windows, reload, address,
 * find, print, save, tabs by number. Common practice, no source.
 */
const BROWSER_KEYS = [
	...['n', 't', 'w', 'r', 'l', 'f', 'p', 's', 'o', 'h', 'j', 'Tab', 'F4', 'F5'].map(
		(key) => `Mod+${key}`
	),
	...['n', 't', 'w', 'r', 'i', 'j', 'c', 'p', 'Tab'].map((key) => `Mod+Shift+${key}`),
	...Array.from({ length: 9 }, (_, k) => `Mod+${k + 1}`),
	'F1',
	'F3',
	'F5',
	'F6',
	'F7',
	'F11',
	'F12',
	'Tab',
	'Shift+Tab'
];

describe('commands', () => {
	it('no two commands have the same key or the same id', () => {
		const keys = commands.flatMap((command) => command.keys);
		expect(new Set(keys).size).toBe(keys.length);
		expect(new Set(commands.map(({ id }) => id)).size).toBe(commands.length);
	});

	it('none takes a key of the browser', () => {
		const keys = new Set(commands.flatMap((command) => command.keys));
		expect(BROWSER_KEYS.filter((key) => keys.has(key))).toEqual([]);
	});

	it.each<[string, Partial<KeyPress>, string]>([
		['Ctrl+Z', { key: 'z', code: 'KeyZ', ctrlKey: true }, 'undo'],
		['Cmd+Z', { key: 'z', code: 'KeyZ', metaKey: true }, 'undo'],
		['Ctrl+Shift+Z', { key: 'Z', code: 'KeyZ', ctrlKey: true, shiftKey: true }, 'redo'],
		['Ctrl+Y', { key: 'y', code: 'KeyY', ctrlKey: true }, 'redo'],
		['Shift+1 on an English layout', { key: '!', code: 'Digit1', shiftKey: true }, 'fit'],
		['Shift+2 on a German layout', { key: '"', code: 'Digit2', shiftKey: true }, 'fit-selection'],
		['Ctrl+0', { key: '0', code: 'Digit0', ctrlKey: true }, 'full-scale'],
		['plus with Shift', { key: '+', code: 'Equal', shiftKey: true }, 'zoom-in'],
		['question mark', { key: '?', code: 'Slash', shiftKey: true }, 'keys'],
		['R with caps lock', { key: 'R', code: 'KeyR' }, 'rotate'],
		['Shift+arrow', { key: 'ArrowUp', code: 'ArrowUp', shiftKey: true }, 'nudge-up-far']
	])('%s', (_name, changes, id) => {
		expect(commandOf(press(changes))?.id).toBe(id);
	});

	it('keys with Alt are left alone: they open menus', () => {
		expect(commandOf(press({ key: 'e', code: 'KeyE', altKey: true }))).toBeUndefined();
	});

	it('nothing fires while somebody types', () => {
		const element = (tagName: string, isContentEditable = false) => ({
			tagName,
			isContentEditable
		});
		for (const tag of ['INPUT', 'TEXTAREA', 'SELECT'])
			expect(isTyping(element(tag), false)).toBe(true);
		expect(isTyping(element('DIV', true), false)).toBe(true);
		expect(isTyping(element('DIV'), true)).toBe(true);
		expect(isTyping(element('DIV'), false)).toBe(false);
		expect(isTyping(null, false)).toBe(false);
	});

	it('keys are told in words', () => {
		expect(describeKeys(['Mod+Shift+z', 'Mod+y'])).toBe('Ctrl+Shift+Z or Ctrl+Y');
		expect(describeKeys(['+', '='])).toBe('+ or =');
		expect(describeKeys(['Shift+ArrowLeft'])).toBe('Shift+←');
	});

	it('those that need the page are there only where it offers them', () => {
		const driver = new EditorDriver(smallPlan());
		expect(driver.key('Mod+Enter')).toBe(false);
		let solves = 0;
		driver.page = { solve: () => solves++ };
		expect(driver.key('Mod+Enter')).toBe(true);
		expect(solves).toBe(1);
	});

	it('fit, fit selection and 100 %', () => {
		const driver = new EditorDriver(smallPlan());
		const fitted = driver.editor.camera;
		driver.key('Mod+0');
		expect(driver.editor.camera.pxPerUm).toBe(1);
		driver.key('+');
		expect(driver.editor.camera.pxPerUm).toBeCloseTo(1.3);
		driver.editor.select([{ list: 'regulators', id: 'R1' }]);
		driver.key('Shift+2');
		expect([driver.editor.camera.centreXUm, driver.editor.camera.centreYUm]).toEqual([120, 110]);
		driver.key('Shift+1');
		expect(driver.editor.camera).toEqual(fitted);
	});
});
