import AxeBuilder from '@axe-core/playwright';
import { expect, test, type Page } from '@playwright/test';
import { origin, signIn } from './people.ts';

/** Accounts of this file's own, so that the demo's people stay as they are. */
let founders = 0;

/** Founds a team and ends on its empty list of projects. */
async function foundTeam(page: Page): Promise<{ email: string; password: string }> {
	founders++;
	const account = {
		email: `founder-${founders}-${Date.now()}@example.com`,
		password: 'five quiet herons wade'
	};
	await page.goto(`${origin()}/sign-up`);
	await page.getByLabel('Team').fill('Reed Works');
	await page.getByLabel('Your name').fill('Ines Falk');
	await page.getByLabel('Mail address').fill(account.email);
	await page.getByLabel('Password').fill(account.password);
	await page.getByRole('button', { name: 'Found the team' }).click();
	await expect(page.getByText('You are in no project yet.')).toBeVisible();
	return account;
}

async function startProject(page: Page, name: string): Promise<void> {
	await page.getByLabel('Name of the project').fill(name);
	await page.getByRole('button', { name: 'Start' }).click();
	await expect(page.getByRole('heading', { name, level: 1 })).toBeVisible();
}

test('signs in by keyboard alone; the first error has the focus and the input stays', async ({
	page
}) => {
	await page.goto(`${origin()}/sign-in`);
	const email = page.getByLabel('Mail address');
	const password = page.getByLabel('Password');
	await email.focus();
	await page.keyboard.type('placer');
	await page.keyboard.press('Tab');
	await expect(password).toBeFocused();
	await page.keyboard.type('many small weirs');
	await page.keyboard.press('Enter');
	await expect(email).toBeFocused();
	await expect(email).toHaveAttribute('aria-invalid', 'true');
	await expect(email).toHaveValue('placer');
	await expect(page.getByText(/Enter a mail address such as/)).toBeVisible();

	await page.keyboard.press('End');
	await page.keyboard.type('@osier.example');
	await page.keyboard.press('Tab');
	await page.keyboard.press('Control+a');
	await page.keyboard.type('not the password');
	await page.keyboard.press('Enter');
	await expect(page.getByRole('alert')).toHaveText(/Address or password is not right/);

	await password.fill('many small weirs');
	await page.keyboard.press('Enter');
	await expect(page.getByRole('heading', { name: 'Projects', level: 1 })).toBeVisible();

	// The first Tab of a page leads past the navigation.
	await page.reload();
	await page.keyboard.press('Tab');
	await expect(page.getByRole('link', { name: 'To the content' })).toBeFocused();
	await page.keyboard.press('Enter');
	await expect(page.locator('#main')).toBeFocused();
});

test('a founder goes from an empty team to a copy of the demo', async ({ page }) => {
	await foundTeam(page);
	expect((await new AxeBuilder({ page }).analyze()).violations).toEqual([]);
	await startProject(page, 'Reed one');
	await expect(page.getByText('No floorplan yet.')).toBeVisible();
	await page.getByRole('radio', { name: /A copy of the demo/ }).check();
	await page.getByLabel('Name of the floorplan').fill('First try');
	await page.getByRole('button', { name: 'Add', exact: true }).click();
	await expect(page).toHaveURL(/\/floorplans\//);
	await page.goto(`${origin()}/projects`);
	const row = page.getByRole('row', { name: /First try/ });
	await expect(row).toContainText('96 regulators, 24 blocks');
	await expect(row).toContainText('Ines Falk');
});

test('a file is taken whole or refused with the path of every problem', async ({ page }) => {
	await foundTeam(page);
	await startProject(page, 'Reed two');
	await page.getByRole('radio', { name: /A Manyweir file/ }).check();
	const upload = (name: string, text: string) =>
		page
			.getByLabel('File', { exact: true })
			.setInputFiles({ name, mimeType: 'application/json', buffer: Buffer.from(text) });
	const add = page.getByRole('button', { name: 'Add', exact: true });
	const refusal = page.getByRole('alert');

	await upload('broken.json', '{"format":');
	await add.click();
	await expect(refusal).toHaveText(/Nothing was added\..*broken\.json is not JSON/s);

	const plan = {
		format: 'manyweir-floorplan',
		version: 1,
		die: {
			outline: [
				[0, 0],
				[100, 0],
				[100, 100],
				[0, 100]
			]
		},
		layers: [{ id: 'M1', direction: 'horizontal', sheetOhm: 0.05 }],
		nets: [{ id: 'vdd', kind: 'input', volts: 1 }],
		straps: [{ id: 's', net: 'vdd', layer: 'M1', pitchUm: 10, widthUm: 2, offsetUm: 5 }]
	};
	const wrong = {
		...plan,
		straps: [{ ...plan.straps[0], widthUm: -2, net: 'vss' }],
		layers: [{ ...plan.layers[0], sheetOhm: 'low' }]
	};
	await upload('wrong.json', JSON.stringify(wrong));
	await add.click();
	await expect(refusal).toHaveText(/layers\[0\] \(M1\)\.sheetOhm: /);
	await expect(refusal).toHaveText(/straps\[0\] \(s\)\.widthUm: /);

	await upload('right.manyweir.json', JSON.stringify(plan));
	await add.click();
	await expect(page).toHaveURL(/\/floorplans\//);
	await page.goto(`${origin()}/projects`);
	await expect(page.getByRole('row', { name: /^right / })).toContainText('0 regulators');
});

test('the theme is chosen once and stays', async ({ page }) => {
	await page.emulateMedia({ colorScheme: 'light' });
	await page.goto(`${origin()}/sign-in`);
	const root = page.locator('html');
	await expect(root).toHaveAttribute('data-theme', 'light');
	await page.emulateMedia({ colorScheme: 'dark' });
	await expect(root).toHaveAttribute('data-theme', 'dark');
	await page.getByRole('button', { name: 'Theme' }).press('Enter');
	await page.getByRole('menuitemradio', { name: 'Light' }).press('Enter');
	await expect(root).toHaveAttribute('data-theme', 'light');
	await page.reload();
	await expect(root).toHaveAttribute('data-theme', 'light');
	await expect(page.getByRole('button', { name: 'Theme' })).toBeVisible();
});

test('a lead gives somebody another role, and the last lead stays', async ({ page }) => {
	await signIn(page, 'lead');
	await page.goto(`${origin()}/projects`);
	await page.locator('h2 a[href^="/projects/"]').first().click();
	const role = (name: string) => page.getByRole('combobox', { name: `Role of ${name}` });
	await role('Pavel Dunne').selectOption('analyst');
	await expect(page.getByRole('row', { name: /Pavel Dunne/ })).toContainText('sets loads');
	await role('Pavel Dunne').selectOption('viewer');
	await expect(page.getByRole('row', { name: /Pavel Dunne/ })).toContainText('reads and comments');

	await role('Livia Tarn').selectOption('viewer');
	await expect(page.getByText(/keeps at least one lead/)).toBeVisible();
	await expect(role('Livia Tarn')).toHaveValue('lead');

	// A removal can be taken back.
	await page.getByRole('button', { name: 'Remove Pavel Dunne' }).click();
	await expect(page.getByRole('row', { name: /Pavel Dunne/ })).toBeHidden();
	await page.getByRole('button', { name: 'Undo' }).click();
	await expect(page.getByRole('row', { name: /Pavel Dunne/ })).toContainText('reads and comments');
});

test('a changed password ends other sessions, and so does signing out everywhere', async ({
	page,
	browser
}) => {
	const { email, password } = await foundTeam(page);
	const other = await (await browser.newContext()).newPage();
	const signInOther = async (word: string) => {
		await other.goto(`${origin()}/sign-in`);
		await other.getByLabel('Mail address').fill(email);
		await other.getByLabel('Password').fill(word);
		await other.getByRole('button', { name: 'Sign in' }).click();
		await expect(other.getByRole('heading', { name: 'Projects', level: 1 })).toBeVisible();
	};
	await signInOther(password);

	await page.getByRole('link', { name: 'Account' }).click();
	await page.getByLabel('Present password').fill('something else');
	await page.getByLabel('New password').fill('six patient herons wade');
	await page.getByRole('button', { name: 'Change the password' }).click();
	await expect(page.getByText('This is not your present password')).toBeVisible();
	await page.getByLabel('Present password').fill(password);
	await page.getByLabel('New password').fill('six patient herons wade');
	await page.getByRole('button', { name: 'Change the password' }).click();
	await expect(page.getByText('The password was changed')).toBeVisible();
	await other.reload();
	await expect(other).toHaveURL(/\/sign-in/);

	await signInOther('six patient herons wade');
	await page.getByRole('button', { name: 'Sign out everywhere' }).click();
	await expect(page).toHaveURL(/\/sign-in/);
	await other.reload();
	await expect(other).toHaveURL(/\/sign-in/);
	await other.context().close();
});

test('pages fit a narrow screen without scrolling sideways (A11Y-11)', async ({ page }) => {
	await page.setViewportSize({ width: 320, height: 640 });
	const fits = () => page.evaluate(() => document.documentElement.scrollWidth <= window.innerWidth);
	await page.goto(`${origin()}/sign-up`);
	expect(await fits(), '/sign-up').toBe(true);
	await signIn(page, 'admin');
	for (const path of ['/projects', '/team', '/account']) {
		await page.goto(origin() + path);
		await expect(page.getByRole('heading', { level: 1 })).toBeVisible();
		expect(await fits(), path).toBe(true);
	}
	await page.goto(`${origin()}/projects`);
	await page.locator('h2 a[href^="/projects/"]').first().click();
	await expect(page.getByRole('heading', { name: 'Members' })).toBeVisible();
	expect(await fits(), 'project').toBe(true);
});

test('an address that leads nowhere says what to do', async ({ page }) => {
	await signIn(page, 'viewer');
	await page.goto(`${origin()}/projects/00000000-0000-4000-8000-000000000000`);
	await expect(page.getByText('Status 404')).toBeVisible();
	expect((await new AxeBuilder({ page }).analyze()).violations).toEqual([]);
	await page.getByRole('link', { name: 'To the projects' }).click();
	await expect(page.getByRole('heading', { name: 'Projects', level: 1 })).toBeVisible();
});
