import type { GridWorkbook, Proposal } from '$lib/schemas/sheet';
import { appendAudit } from '../audit/append';
import { sha256 } from '../audit/canonical';
import { write, type Tx } from '../database';
import { Run, RunRevision, Sheet, User, type Study } from '../database/models';
import { AppError } from '../errors';
import type { Actor } from '../policy';
import { settings } from '../settings';
import { findStudy } from '../studies/find';
import { examine } from './examine';
import { plainFileName, readWorkbook, SheetRefusal, type RefusalCode } from './reading';
import { surroundingsOf } from './surroundings';
import type { StoredWork } from './work';

export interface ReceiveSheetInput {
	studyId: string;
	fileName: string;
	bytes: Uint8Array;
}

/** The same bytes were read before. */
export interface Duplicate {
	sheetId: string;
	fileName: string;
	receivedAt: Date;
	receivedBy: string;
	/** Numbers of the runs that were made of it. */
	runs: number[];
	message: string;
}

export interface ReceivedSheet {
	id: string;
	fileName: string;
	size: number;
	sha256: string;
	version: number;
	duplicateOf: Duplicate | null;
	proposal: Proposal;
	/** Stop and Ask findings that wait for an answer. */
	open: number;
}

const TOO_LARGE: RefusalCode[] = ['too-large', 'too-many-cells', 'bomb', 'out-of-memory'];

function refusal(caught: SheetRefusal): AppError {
	if (caught.code === 'busy')
		return new AppError('unavailable', caught.message, { data: { retryAfterS: 60 } });
	const code = TOO_LARGE.includes(caught.code) ? 'too-large' : 'unsupported-file';
	return new AppError(code, caught.message, { data: { refused: caught.code } });
}

async function read(actor: Actor, study: Study, input: ReceiveSheetInput): Promise<GridWorkbook> {
	try {
		return await readWorkbook(input.bytes, input.fileName, {
			fileBytes: settings().UPLOAD_LIMIT_MB * 1_048_576
		});
	} catch (caught) {
		if (!(caught instanceof SheetRefusal)) throw caught;
		if (caught.code !== 'busy') await noteRefusal(actor, study, input, caught.code);
		throw refusal(caught);
	}
}

async function noteRefusal(
	actor: Actor,
	study: Study,
	input: ReceiveSheetInput,
	code: RefusalCode
): Promise<void> {
	await write((tx) =>
		appendAudit(tx, actor, {
			type: 'sheet.refused',
			payload: { fileName: plainFileName(input.fileName), size: input.bytes.length, code },
			groupId: study.groupId,
			studyId: study.id,
			objectType: 'study',
			objectId: study.id
		})
	);
}

const MEDIA_TYPES: Record<GridWorkbook['kind'], string> = {
	xlsx: 'application/vnd.openxmlformats-officedocument.spreadsheetml.sheet',
	text: 'text/csv',
	paste: 'text/tab-separated-values'
};

/** The sheet with the same bytes in this study, if there is one. */
async function findDuplicate(studyId: string, hash: string, tx: Tx): Promise<Sheet | null> {
	return Sheet.findOne({
		where: { studyId, sha256: hash },
		attributes: ['id', 'fileName', 'size', 'sha256', 'version', 'uploadedById', 'createdAt', 'work'],
		transaction: tx
	});
}

async function describeDuplicate(sheet: Sheet): Promise<Duplicate> {
	const revisions = await RunRevision.findAll({
		where: { sheetId: sheet.id },
		attributes: ['id', 'runId']
	});
	const [runs, person] = await Promise.all([
		Run.findAll({
			where: { id: [...new Set(revisions.map((r) => r.runId))] },
			attributes: ['id', 'number'],
			order: [['number', 'ASC']]
		}),
		User.findByPk(sheet.uploadedById, { attributes: ['id', 'name'] })
	]);
	const numbers = runs.map((run) => run.number);
	const made = numbers.length
		? ` ${numbers.length === 1 ? 'Run' : 'Runs'} ${numbers.join(', ')} ${numbers.length === 1 ? 'was' : 'were'} made of it.`
		: ' No run was made of it yet.';
	return {
		sheetId: sheet.id,
		fileName: sheet.fileName,
		receivedAt: sheet.createdAt,
		receivedBy: person?.name ?? 'somebody who has left',
		runs: numbers,
		message: `The same file, byte for byte, was already read as ${sheet.fileName}.${made}`
	};
}

interface Received {
	sheet: Sheet;
	duplicate: boolean;
}

function store(
	actor: Actor,
	input: ReceiveSheetInput,
	workbook: GridWorkbook,
	work: StoredWork
): Promise<Received> {
	const hash = sha256(input.bytes);
	const fileName = plainFileName(input.fileName);
	return write(async (tx) => {
		const study = await findStudy(actor, input.studyId, 'sheet.upload', tx);
		const known = await findDuplicate(study.id, hash, tx);
		if (known) return { sheet: known, duplicate: true };
		const sheet = await Sheet.create(
			{
				studyId: study.id,
				groupId: study.groupId,
				fileName,
				mediaType: MEDIA_TYPES[workbook.kind],
				size: input.bytes.length,
				sha256: hash,
				bytes: Buffer.from(input.bytes),
				reading: workbook,
				work,
				uploadedById: actor.userId
			},
			{ transaction: tx }
		);
		await appendAudit(tx, actor, {
			type: 'sheet.received',
			payload: { fileName, size: input.bytes.length, sha256: hash },
			groupId: study.groupId,
			studyId: study.id,
			objectType: 'sheet',
			objectId: sheet.id
		});
		return { sheet, duplicate: false };
	});
}

/**
 * Takes a sheet as it is: byte for byte, with its checksum, beside what was read from it. A file that is refused is
 * noted in the audit trail and not kept; the same bytes again lead to the sheet that is there.
 */
export async function receiveSheet(actor: Actor, input: ReceiveSheetInput): Promise<ReceivedSheet> {
	const study = await findStudy(actor, input.studyId, 'sheet.upload');
	const workbook = await read(actor, study, input);
	const surroundings = await surroundingsOf(study.id, study.groupId);
	const work = { tables: {} };
	const { proposal, settlements } = await examine({ workbook, work, questionsOnly: true, ...surroundings });
	const open = Object.values(settlements).reduce((sum, s) => sum + s.open, 0);
	const { sheet, duplicate } = await store(actor, input, workbook, { tables: {}, open });
	return {
		id: sheet.id,
		fileName: sheet.fileName,
		size: sheet.size,
		sha256: sheet.sha256,
		version: sheet.version,
		duplicateOf: duplicate ? await describeDuplicate(sheet) : null,
		proposal: {
			...proposal,
			tables: proposal.tables.map((t) => ({ ...t, findings: settlements[t.id]?.findings ?? t.findings }))
		},
		open
	};
}
