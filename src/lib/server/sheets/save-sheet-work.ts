import type { GridWorkbook } from '$lib/schemas/sheet';
import { sheetWorkSchema, type SheetWork } from '$lib/schemas/sheet-work';
import { write } from '../database';
import { RunRevision, Sheet } from '../database/models';
import { versionChanged } from '../errors';
import type { Actor } from '../policy';
import { examine } from './examine';
import { findSheet } from './find';
import { signedCorrections } from './signed-corrections';
import { surroundingsOf } from './surroundings';
import { workOf, type StoredWork } from './work';

export interface SaveSheetWorkInput {
	sheetId: string;
	version: number;
	work: unknown;
}

/** Questions left open over the tables that no run has been made of (`done`: nor is about to be). */
export async function countOpen(sheet: Sheet, work: SheetWork, done: string[] = []): Promise<number> {
	const surroundings = await surroundingsOf(sheet.studyId, sheet.groupId);
	const workbook = sheet.reading as GridWorkbook;
	const { settlements } = await examine({ workbook, work, questionsOnly: true, ...surroundings });
	const confirmed = await RunRevision.findAll({
		where: { sheetId: sheet.id },
		attributes: ['id', 'tableKey']
	});
	const settled = new Set([...done, ...confirmed.map((r) => r.tableKey)]);
	return Object.entries(settlements)
		.filter(([key]) => !settled.has(key))
		.reduce((sum, [, settlement]) => sum + settlement.open, 0);
}

function signed(actor: Actor, work: SheetWork, stored: SheetWork): SheetWork {
	const tables = Object.entries(work.tables).map(([key, table]) => [
		key,
		{ ...table, corrections: signedCorrections(actor, table.corrections, stored.tables[key]) }
	]);
	return { tables: Object.fromEntries(tables) as SheetWork['tables'] };
}

/** Keeps mapping, answers and corrections beside the sheet; nothing of it touches the file as received. */
export async function saveSheetWork(
	actor: Actor,
	input: SaveSheetWorkInput
): Promise<{ version: number; savedAt: Date; open: number }> {
	const sheet = await findSheet(actor, input.sheetId, 'sheet.upload', { with: ['reading'] });
	const work = signed(actor, sheetWorkSchema.parse(input.work), workOf(sheet.work));
	const stored: StoredWork = { ...work, open: await countOpen(sheet, work) };
	return write(async (tx) => {
		const now = await findSheet(actor, input.sheetId, 'sheet.upload', { tx });
		const [count] = await Sheet.update(
			{ work: stored, version: input.version + 1 },
			{ where: { id: now.id, version: input.version }, transaction: tx }
		);
		if (count !== 1) throw versionChanged({ version: now.version, work: workOf(now.work) });
		return { version: input.version + 1, savedAt: new Date(), open: stored.open };
	});
}
