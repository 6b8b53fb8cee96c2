import type { RunContent } from '$lib/schemas/run';
import { withLogChoice } from '$lib/schemas/temperature-log';
import type { SpeciesContent } from '$lib/schemas/scheme';
import type { Conditions, GridWorkbook, Mapping, Settlement, TableProposal } from '$lib/schemas/sheet';
import {
	confirmRunSchema,
	type ConfirmRun,
	type ConfirmRunInput,
	type TableWork
} from '$lib/schemas/sheet-work';
import { proposeBlock, sentenceToConfirm } from '$lib/assay';
import { contentHash } from '../audit/canonical';
import { write, type Tx } from '../database';
import { Run, RunRevision, Sheet } from '../database/models';
import { AppError, notFound, versionChanged, type FieldProblem } from '../errors';
import type { Actor } from '../policy';
import { carryExclusions } from '../runs/carry-exclusions';
import { addRun } from '../runs/create-run';
import { findRun } from '../runs/find';
import { currentRevision, requireReason, requireRunVersion } from '../runs/revisions';
import { revise } from '../runs/revise-run';
import { findStudy } from '../studies/find';
import { examine, workOn, type Surroundings } from './examine';
import { findSheet } from './find';
import { countOpen } from './save-sheet-work';
import { keepMapping } from './save-mapping';
import { signedCorrections } from './signed-corrections';
import { surroundingsOf } from './surroundings';
import { workOf, type StoredWork } from './work';

export interface ConfirmInput extends ConfirmRunInput {
	sheetId: string;
	/** Version of the sheet's work that was looked at; the newest, when left out. */
	version?: number;
}

export interface ConfirmedRun {
	id: string;
	number: number;
	name: string;
	version: number;
	revision: number;
	revisionId: string;
	/** What was done to the numbers on their way, in words. */
	conversions: string[];
	/** Where a new run begins in the same table, when the person said so. */
	rest: Settlement['rest'];
}

/** Cells and fields that still stand in the way. */
function obstacles(settlement: Settlement): FieldProblem[] {
	const open = settlement.findings
		.filter((finding) => finding.open)
		.map((finding) => ({
			field: finding.cells.length ? `${finding.sheet}!${finding.cells[0]}` : finding.sheet,
			message: finding.problem ? `${finding.message} ${finding.problem}` : finding.message
		}));
	const needed = settlement.needs.map((need) => ({
		field: need.species ? `conditions.${need.field}.${need.species}` : `conditions.${need.field}`,
		message: need.message
	}));
	return [...open, ...needed];
}

function requireRun(settlement: Settlement): NonNullable<Settlement['run']> {
	const fields = obstacles(settlement);
	if (settlement.run && fields.length === 0) return settlement.run;
	const count = fields.length === 1 ? 'One question is' : `${fields.length} questions are`;
	throw new AppError(
		'invalid',
		`${count} open: a run is made only when nothing is. ${fields[0]?.message ?? ''}`.trim(),
		{
			fields
		}
	);
}

/** A value entered as an answer is a correction too: it carries the same name and time. */
function withSigned(actor: Actor, content: RunContent): RunContent {
	if (!content.corrections) return content;
	const at = new Date().toISOString();
	const corrections = content.corrections.map((c) => ({ ...c, by: c.by ?? actor.name, at: c.at ?? at }));
	return { ...content, corrections };
}

interface Settled {
	work: TableWork;
	/** As proposed; nothing for a table that a person drew. */
	table: TableProposal | undefined;
	settlement: Settlement;
	/** What has to be confirmed as seen in the lab. */
	sentence: string | null;
}

/** A time unit chosen by hand is confirmed in words, here as on the page: a run that is 60 times too fast must not come in by script. */
function requireSeenInLab({ work, sentence }: Settled): void {
	if (sentence === null || work.mapping.conditions?.seenInLab === sentence) return;
	const message = `The time unit was chosen by hand. Confirm what it means as seen in the lab, word by word: "${sentence}"`;
	throw new AppError('invalid', message, {
		fields: [{ field: 'conditions.seenInLab', message }],
		data: { sentence }
	});
}

/** What was decided besides the cells: which temperature counts, and what was confirmed as seen in the lab. */
function withChoices(content: RunContent, conditions: Conditions | undefined): RunContent {
	const chosen = withLogChoice(content, conditions?.useTemperatureLog);
	const seen = conditions?.seenInLab;
	if (!seen) return chosen;
	const line = `Time unit chosen by hand; confirmed as seen in the lab: ${seen}`;
	return { ...chosen, conversions: [...(chosen.conversions ?? []), line.slice(0, 400)].slice(-500) };
}

/** A table that a person drew, as the reader would propose it. */
const proposeDrawn = (workbook: GridWorkbook, species: SpeciesContent[], key: string, mapping: Mapping) =>
	proposeBlock(
		workbook,
		species,
		mapping.sheet,
		mapping.block,
		mapping.across ? null : mapping.headerRows,
		key
	);

async function proposedMapping(
	workbook: GridWorkbook,
	surroundings: Surroundings,
	tableKey: string
): Promise<Mapping | undefined> {
	const { proposal } = await examine({ workbook, work: { tables: {} }, only: [], ...surroundings });
	return workOn(proposal, { tables: {} }, tableKey)?.mapping;
}

async function settleTable(actor: Actor, sheet: Sheet, input: ConfirmRun): Promise<Settled> {
	const workbook = sheet.reading as GridWorkbook;
	const surroundings = await surroundingsOf(sheet.studyId, sheet.groupId);
	const mapping = input.mapping ?? (await proposedMapping(workbook, surroundings, input.tableKey));
	if (!mapping) throw notFound(`table "${input.tableKey}" in this sheet`);
	const work: TableWork = {
		mapping: input.conditions ? { ...mapping, conditions: input.conditions } : mapping,
		answers: input.answers,
		corrections: signedCorrections(actor, input.corrections, workOf(sheet.work).tables[input.tableKey]),
		name: input.name
	};
	const { proposal, settlements } = await examine({
		workbook,
		work: { tables: { [input.tableKey]: work } },
		only: [input.tableKey],
		...surroundings
	});
	const table = proposal.tables.find((t) => t.id === input.tableKey);
	const settlement = settlements[input.tableKey];
	const asProposed = table ?? proposeDrawn(workbook, surroundings.species, input.tableKey, mapping);
	return { work, table, settlement, sentence: sentenceToConfirm(asProposed, work.mapping, settlement) };
}

/** One table makes one run; a second reading of it is a revision of that run, with a reason. */
async function requireUnused(tx: Tx, sheet: Sheet, tableKey: string): Promise<void> {
	const used = await RunRevision.findOne({ where: { sheetId: sheet.id, tableKey }, transaction: tx });
	const run = used && (await Run.findByPk(used.runId, { transaction: tx }));
	if (!run) return;
	throw new AppError(
		'conflict',
		`This table is run ${run.number} already. Confirm it as a revision of run ${run.number}, with a reason.`,
		{ data: { runId: run.id, number: run.number, version: run.version } }
	);
}

async function writeRun(
	tx: Tx,
	actor: Actor,
	sheet: Sheet,
	input: ConfirmRun,
	settled: Settled
): Promise<Pick<ConfirmedRun, 'id' | 'number' | 'name' | 'version' | 'revision' | 'revisionId'>> {
	const { work } = settled;
	const content = withChoices(withSigned(actor, requireRun(settled.settlement)), work.mapping.conditions);
	const { tableKey, revisionOf } = input;
	if (revisionOf) {
		const run = await findRun(actor, revisionOf.runId, 'run.write', tx);
		if (run.studyId !== sheet.studyId) throw notFound('run of this study');
		await requireRunVersion(run, revisionOf.version, tx);
		const reason = requireReason(revisionOf.reason);
		const before = await currentRevision(run, tx);
		const next = carryExclusions(before.content, content);
		if (contentHash(next) === before.contentHash)
			throw new AppError(
				'invalid',
				`What was read is what run ${run.number} holds already; there is nothing to revise.`
			);
		const saved = await revise(tx, actor, run, { content: next, reason, sheetId: sheet.id, tableKey });
		const { version, revision, revisionId } = saved;
		return { id: run.id, number: run.number, name: run.name, version, revision, revisionId };
	}
	await requireUnused(tx, sheet, tableKey);
	const study = await findStudy(actor, sheet.studyId, 'run.write', tx);
	const { run, revision } = await addRun(tx, actor, study, {
		name: input.name,
		content,
		sheetId: sheet.id,
		tableKey,
		answers: { mapping: work.mapping, answers: work.answers, corrections: work.corrections }
	});
	const { id, number, name, version } = run;
	return { id, number, name, version, revision: 1, revisionId: revision.id };
}

/** Whether replicates are samples or injections is an answer, and asked once: it goes into the mapping that is kept. */
function asAnswered({ work, settlement }: Settled): TableWork {
	const answered = settlement.mapping;
	const replicates = answered.replicates ?? work.mapping.replicates;
	const columnReplicates = answered.columnReplicates ?? work.mapping.columnReplicates;
	const kept = { ...(replicates ? { replicates } : {}), ...(columnReplicates ? { columnReplicates } : {}) };
	return { ...work, mapping: { ...work.mapping, ...kept } };
}

/** Work as it was confirmed, so that the page shows it again and the count of open questions is right. */
async function workAfter(sheet: Sheet, input: ConfirmRun, settled: Settled): Promise<StoredWork> {
	const work = workOf(sheet.work);
	const tables = { ...work.tables, [input.tableKey]: settled.work };
	return { tables, open: await countOpen(sheet, { tables }, [input.tableKey]) };
}

/**
 * Makes a run of a table, when every question is answered and nothing is missing; otherwise says which cells and
 * conditions stand in the way.
 */
export async function confirmRun(actor: Actor, input: ConfirmInput): Promise<ConfirmedRun> {
	const sheet = await findSheet(actor, input.sheetId, 'run.write', { with: ['reading'] });
	const { sheetId: _sheetId, version, ...rest } = input;
	const asked = confirmRunSchema.parse(rest);
	const settled = await settleTable(actor, sheet, asked);
	requireRun(settled.settlement);
	requireSeenInLab(settled);
	const work = await workAfter(sheet, asked, settled);
	return write(async (tx) => {
		const now = await findSheet(actor, input.sheetId, 'run.write', { tx });
		const seen = version ?? sheet.version;
		const [count] = await Sheet.update(
			{ work, version: seen + 1 },
			{ where: { id: now.id, version: seen }, transaction: tx }
		);
		if (count !== 1) throw versionChanged({ version: now.version, work: workOf(now.work) });
		const made = await writeRun(tx, actor, sheet, asked, settled);
		if (settled.table) await keepMapping(tx, actor, sheet.groupId, settled.table, asAnswered(settled));
		return { ...made, conversions: settled.settlement.conversions, rest: settled.settlement.rest };
	});
}
