import { appendAudit } from '../audit/append';
import { sha256 } from '../audit/canonical';
import { write } from '../database';
import { WorkbookExport } from '../database/models';
import type { Actor } from '../policy';
import { callEngine } from '../jobs/engine-calls';
import { about } from '../recipes/audit';
import { findRecipe } from '../recipes/find';
import { readRecipe } from '../recipes/read-recipe';
import source from './build.worker.ts?nodeworker';
import { collectWorkbook } from './collect';

const LONGEST_MS = 120_000;

export interface ExportedWorkbook {
	fileName: string;
	bytes: Buffer;
	sha256: string;
}

/** The QA workbook of a version; what was handed out is kept byte for byte, with who asked for it. */
export async function exportWorkbook(
	actor: Actor,
	input: { recipeId: string; number?: number }
): Promise<ExportedWorkbook> {
	const recipe = await findRecipe(actor, input.recipeId, 'workbook.export');
	const view = await readRecipe({ ...actor, scopes: undefined }, recipe.id, input.number);
	// Written in a thread: a large record takes seconds, and everybody else goes on working.
	const task = await collectWorkbook(view, actor.name);
	const bytes = Buffer.from(await callEngine<Uint8Array>({ source, task, longestMs: LONGEST_MS }));
	const digest = sha256(bytes);
	await write(async (tx) => {
		await WorkbookExport.create(
			{
				recipeVersionId: view.shown.id,
				groupId: recipe.groupId,
				sha256: digest,
				size: bytes.length,
				bytes,
				exportedById: actor.userId
			},
			{ transaction: tx }
		);
		await appendAudit(tx, actor, {
			type: 'workbook.exported',
			payload: { number: view.shown.number, sha256: digest },
			...about(recipe, view.shown.number)
		});
	});
	return { fileName: `recipe-${recipe.number}-v${view.shown.number}.xlsx`, bytes, sha256: digest };
}
