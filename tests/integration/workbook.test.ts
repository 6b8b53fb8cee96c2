import { beforeAll, describe, expect, it } from 'vitest';
import { unzipSync, strFromU8 } from 'fflate';
import { AuditEvent, WorkbookExport, type Group } from '../../src/lib/server/database/models';
import { sha256 } from '../../src/lib/server/audit/canonical';
import type { Actor } from '../../src/lib/server/policy';
import { createRecipe } from '../../src/lib/server/recipes/create-recipe';
import { readRecipe } from '../../src/lib/server/recipes/read-recipe';
import { saveRecipe } from '../../src/lib/server/recipes/save-recipe';
import { submitRecipe } from '../../src/lib/server/recipes/submit-recipe';
import { validateRecipe } from '../../src/lib/server/recipes/validate-recipe';
import { exportWorkbook } from '../../src/lib/server/workbook/export-workbook';
import { SHEETS } from '../../src/lib/server/workbook/layout';
import { cellText, looksLikeFormula } from '../../src/lib/server/workbook/text';
import { actorOf, makeGroup, makePerson, openTestDatabase } from './support';
import { prepareStudy, type Prepared } from './recipe-support';
import { recalculate, type Recalculated } from './recalculate';

openTestDatabase();

const PASSWORD = 'amber glass and verdigris';
const HOSTILE = [
	'=HYPERLINK("http://evil.invalid","click")',
	'+1+1',
	'-2+3',
	'@SUM(A1)',
	'\t=1+1',
	'\r=1+1',
	'name with a bell \u0007 and half a pair \uD83D'
];

let group: Group;
let chemist: Actor;
let lead: Actor;
let qa: Actor;
let prepared: Prepared;
let recipeId: string;
let bytes: Buffer;
let book: Recalculated;

beforeAll(async () => {
	group = await makeGroup({ name: 'Route group', gxp: true });
	const person = async (role: 'chemist' | 'group_lead' | 'qa_reviewer') =>
		actorOf(await makePerson({ group, role, password: PASSWORD }));
	[chemist, lead, qa] = [await person('chemist'), await person('group_lead'), await person('qa_reviewer')];
	prepared = await prepareStudy(chemist, group.id);
	recipeId = (
		await createRecipe(chemist, { studyId: prepared.studyId, fitId: prepared.fitId, title: '=cmd|A1!x' })
	).id;
	const { shown } = await readRecipe(chemist, recipeId);
	const saved = await saveRecipe(chemist, {
		recipeId,
		number: 1,
		version: 1,
		content: {
			...shown.content,
			confirmationRunId: prepared.unusedRunId,
			equipment: HOSTILE.map((text, i) => ({ id: `eq${i}`, text })),
			charges: shown.content.charges.map((c, i) => (i === 0 ? { ...c, material: HOSTILE[0] } : c))
		}
	});
	await submitRecipe(chemist, { recipeId, number: 1, ...saved, password: PASSWORD });
	const review = (await readRecipe(lead, recipeId)).shown;
	await validateRecipe(lead, {
		recipeId,
		number: 1,
		version: review.version,
		contentHash: review.contentHash,
		password: PASSWORD
	});
	({ bytes } = await exportWorkbook(qa, { recipeId }));
	book = await recalculate(bytes);
	// The thread's code is bundled at its first use, which takes a while on a busy machine.
}, 120_000);

describe('the QA workbook of a validated recipe', () => {
	it('has every sheet, and its cover says that all checks hold', () => {
		for (const name of Object.values(SHEETS)) expect(book.sheets).toContain(name);
		expect(book.value(SHEETS.cover, 'B4')).toBe(true);
	});

	it('agrees in every formula cell with the value stored beside it, to 1e-9', () => {
		expect(book.formulas.length).toBeGreaterThan(1000);
		for (const { sheet, address, stored } of book.formulas) {
			const found = book.value(sheet, address);
			if (typeof found === 'number') {
				expect(Math.abs(found - (stored as number)), `${sheet}!${address}`).toBeLessThanOrEqual(
					1e-9 * Math.max(1, Math.abs(found))
				);
			} else expect(found, `${sheet}!${address}`).toBe(true);
		}
	});

	it('says on the cover that it differs once a rate constant is changed', async () => {
		const changed = await recalculate(bytes);
		changed.set(SHEETS.parameters, changed.beside(SHEETS.parameters, 's1.forward.kRef'), 0.8);
		expect(changed.value(SHEETS.cover, 'B4')).toBe('differs from signed values');
	});

	it('carries the source file cell for cell, with the checksum of its bytes', () => {
		expect(book.texts.some((t) => t.sheet === SHEETS.cover && t.text === prepared.sha256)).toBe(true);
		expect(book.value('Received 1', 'A1')).toBe('Time (h)');
		expect(book.value('Received 1', 'B3')).toBe(0.401);
	});

	it('shows printed names, meanings and the hash of the version', () => {
		const signatures = book.texts.filter((t) => t.sheet === SHEETS.signatures).map((t) => t.text);
		expect(signatures).toEqual(expect.arrayContaining(['Authored', 'Validated', chemist.name, lead.name]));
		expect(signatures.some((t) => /Run 2 .* of 33 points inside the 95 % prediction band/.test(t))).toBe(
			true
		);
	});

	it('lists every fit, the exclusions and an extract of the audit trail', () => {
		const fits = book.texts.filter((t) => t.sheet === SHEETS.fits).map((t) => t.text);
		expect(fits).toContain('converged');
		const audit = book.texts.filter((t) => t.sheet === SHEETS.audit).map((t) => t.text);
		expect(audit).toEqual(expect.arrayContaining(['recipe.created', 'recipe.signed']));
	});

	it('keeps hostile text inert: as text cells, never a formula, without control characters', () => {
		const recipe = book.texts.filter((t) => t.sheet === SHEETS.recipe).map((t) => t.text);
		expect(recipe).toContain(HOSTILE[0]);
		expect(recipe).toContain('name with a bell  and half a pair \uFFFD');
		expect(book.formulas.some((f) => /HYPERLINK|SUM\(A1\)|cmd/.test(f.formula))).toBe(false);
		for (const text of HOSTILE.slice(0, 6)) expect(looksLikeFormula(cellText(text))).toBe(true);
	});

	it('holds no macro, link, connection or dynamic array', () => {
		const parts = unzipSync(new Uint8Array(bytes));
		const names = Object.keys(parts);
		expect(names.filter((n) => /vba|externalLink|connections|activeX|embeddings|metadata/i.test(n))).toEqual(
			[]
		);
		const sheets = names.filter((n) => n.startsWith('xl/worksheets/sheet')).map((n) => strFromU8(parts[n]));
		expect(sheets.length).toBe(book.sheets.length);
		for (const xml of sheets) expect(xml).not.toMatch(/<hyperlink|t="array"|cm="/);
		expect(sheets.every((xml) => /<oddFooter>.*&amp;P\/&amp;N/.test(xml))).toBe(true);
	});

	it('has a style part that strict readers accept', () => {
		const styles = strFromU8(unzipSync(new Uint8Array(bytes))['xl/styles.xml']);
		expect(styles).not.toMatch(/<fill\/>|<fill><\/fill>|<numFmts\/>/);
		for (const [, colour] of styles.matchAll(/rgb="([^"]*)"/g)) expect(colour).toMatch(/^[0-9A-F]{8}$/);
	});

	it('is kept byte for byte, on the audit trail, for QA and group lead alone', async () => {
		const kept = await WorkbookExport.findAll({ where: { groupId: group.id } });
		expect(kept).toHaveLength(1);
		expect(kept[0].sha256).toBe(sha256(kept[0].bytes));
		expect(sha256(bytes)).toBe(kept[0].sha256);
		expect(await AuditEvent.count({ where: { type: 'workbook.exported', objectId: recipeId } })).toBe(1);
		await expect(exportWorkbook(chemist, { recipeId })).rejects.toMatchObject({ code: 'not-allowed' });
		const outsider = await actorOf(await makePerson({ group: await makeGroup(), role: 'qa_reviewer' }));
		await expect(exportWorkbook(outsider, { recipeId })).rejects.toMatchObject({ code: 'not-found' });
	});
});
