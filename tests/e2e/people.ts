import { expect, type Page } from '@playwright/test';

/** The demo's people; see src/lib/server/services/demo.ts. */
export type Person = 'placer' | 'analyst' | 'lead' | 'viewer' | 'admin';
const PASSWORD = 'many small weirs';

export function origin(): string {
	const address = process.env.MANYWEIR_TEST_ORIGIN;
	if (!address) throw new Error('the global set-up has not started the product');
	return address;
}

/** Signs in through the form and ends on the list of projects. */
export async function signIn(page: Page, person: Person): Promise<void> {
	await page.goto(`${origin()}/sign-in`);
	await page.getByLabel('Mail address').fill(`${person}@osier.example`);
	await page.getByLabel('Password').fill(PASSWORD);
	await page.getByRole('button', { name: 'Sign in' }).click();
	await expect(page.getByRole('heading', { name: 'Projects', level: 1 })).toBeVisible();
}

/** Opens the demo's floorplan from the list of projects and waits for its drawing and result. */
export async function openDemo(page: Page): Promise<void> {
	await page.locator('a[href^="/floorplans/"]').first().click();
	await expect(drawing(page)).toBeVisible();
	await expect(page.locator('#die-canvas canvas').first()).toBeVisible();
	await expectSaved(page);
}

/** The server has every edit. */
export async function expectSaved(page: Page): Promise<void> {
	await expect(
		page
			.locator('header span:not(.sr-only)')
			.filter({ hasText: /^\s*✓\s*Saved\s*$/ })
			.first()
	).toBeVisible();
}

/** Shown over the ledger while its figures, and the map, are of an earlier plan. */
export function outOfDate(page: Page) {
	return page.getByText('figures of an earlier plan');
}

export function drawing(page: Page) {
	return page.getByRole('application', { name: 'Floorplan', exact: true });
}

/** A row of the ledger by the id in its first cell. */
export function ledgerRow(page: Page, id: string) {
	const name = new RegExp(`^${id.replaceAll('.', '\\.')} `);
	return page.getByRole('region', { name: /^Ledger/ }).getByRole('row', { name });
}

/** Chooses a mode or corner by its name. */
export async function choose(page: Page, what: 'Mode' | 'Corner', name: string): Promise<void> {
	await page.getByRole('combobox', { name: what, exact: true }).selectOption({ label: name });
}

/** Opens a tab of the side panel. */
export async function openPanel(
	page: Page,
	name: 'Reading' | 'Properties' | 'Layers' | 'Review' | 'Findings' | 'Threads'
): Promise<void> {
	await page.getByRole('tab', { name: new RegExp(`^${name}`) }).click();
}
