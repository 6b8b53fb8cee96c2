import type { GridWorkbook } from '$lib/schemas/sheet';
import type { FirstFormResult } from '$lib/schemas/window';
import {
	AuditEvent,
	Fit,
	FitRun,
	Group,
	Run,
	RunRevision,
	Scheme,
	SchemeVersion,
	Sheet,
	User,
	WindowResult
} from '../database/models';
import { readWorkbook } from '../sheets/reading';
import { sha256 } from '../audit/canonical';
import { AppError } from '../errors';
import type { RecipeView } from '../recipes/read-recipe';
import { fitRuns, type FitRunFacts } from '../recipes/fit-facts';
import { settings } from '../settings';
import type { AuditLine, FitLine, ReceivedFile, UsedRun, WorkbookInput } from './input';
import { criteriaOf } from '../studies/read-study';
import { SOFTWARE_VERSION } from './software-version';

const AUDIT_LIMIT = 5_000;

async function readGrid(sheet: Sheet): Promise<GridWorkbook | null> {
	try {
		return await readWorkbook(sheet.bytes, sheet.fileName);
	} catch {
		// The reader refuses what it cannot read; the record keeps the bytes and their checksum all the same.
		return null;
	}
}

async function receivedFiles(revisions: RunRevision[]): Promise<ReceivedFile[]> {
	const ids = [...new Set(revisions.flatMap((r) => (r.sheetId ? [r.sheetId] : [])))];
	const sheets = await Sheet.findAll({ where: { id: ids }, order: [['createdAt', 'ASC']] });
	const files: ReceivedFile[] = [];
	for (const sheet of sheets) {
		if (sha256(sheet.bytes) !== sheet.sha256)
			throw new AppError(
				'conflict',
				`The stored bytes of ${sheet.fileName} no longer match their checksum. Nothing was exported.`
			);
		files.push({
			fileName: sheet.fileName,
			sha256: sheet.sha256,
			size: sheet.size,
			receivedAt: sheet.createdAt,
			grid: await readGrid(sheet)
		});
	}
	return files;
}

async function usedRuns(runs: FitRunFacts[], revisions: RunRevision[]): Promise<UsedRun[]> {
	const sheets = await Sheet.findAll({
		where: { id: revisions.flatMap((r) => (r.sheetId ? [r.sheetId] : [])) },
		attributes: ['id', 'fileName']
	});
	return runs.flatMap((run) => {
		const revision = revisions.find((r) => r.id === run.revisionId);
		if (!revision) return [];
		return [
			{
				label: `Run ${run.number}`,
				number: run.number,
				revision: run.revision,
				current: run.current,
				fileName: sheets.find((s) => s.id === revision.sheetId)?.fileName ?? null,
				content: revision.content
			}
		];
	});
}

const parameterText = (fit: Fit): string =>
	fit.report.parameters
		.map(
			(p) =>
				`${p.id} ${p.estimate}${p.standardError === null ? '' : ` ± ${p.standardError}`} ${p.unit} (${p.state})`
		)
		.join('; ');

const exclusionText = (fit: Fit): string =>
	fit.request.runs
		.flatMap((run, i) =>
			(run.exclusions ?? []).map(
				(e) =>
					`${run.id ?? `r${i + 1}`} row ${e.index + 1} ${e.channel ?? 'all'}: ${e.reasonCode}, ${e.reason}`
			)
		)
		.join('; ');

async function fitLines(studyId: string, used: string): Promise<FitLine[]> {
	const fits = await Fit.findAll({ where: { studyId }, order: [['number', 'ASC']] });
	const fitIds = fits.map((f) => f.id);
	const [versions, links, people] = await Promise.all([
		SchemeVersion.findAll({ where: { id: fits.map((f) => f.schemeVersionId) } }),
		FitRun.findAll({ where: { fitId: fitIds }, order: [['position', 'ASC']] }),
		User.findAll({ where: { id: fits.map((f) => f.createdById) }, attributes: ['id', 'name'] })
	]);
	const [schemes, runs, revisions] = await Promise.all([
		Scheme.findAll({ where: { id: versions.map((v) => v.schemeId) }, attributes: ['id', 'name'] }),
		Run.findAll({ where: { id: links.map((l) => l.runId) }, attributes: ['id', 'number'] }),
		RunRevision.findAll({
			where: { id: links.map((l) => l.runRevisionId) },
			attributes: ['id', 'number']
		})
	]);
	return fits.map((fit) => {
		const version = versions.find((v) => v.id === fit.schemeVersionId);
		const scheme = schemes.find((s) => s.id === version?.schemeId)?.name ?? '';
		return {
			number: fit.number,
			status: fit.report.status,
			scheme: `${scheme} version ${version?.number ?? ''}`,
			runs: links
				.filter((l) => l.fitId === fit.id)
				.map(
					(l) =>
						`${runs.find((r) => r.id === l.runId)?.number ?? ''} (revision ${revisions.find((r) => r.id === l.runRevisionId)?.number ?? ''})`
				)
				.join(', '),
			pointsUsed: fit.report.pointsUsed,
			weightedSsr: fit.report.weightedSsr,
			s: fit.report.residualStandardError,
			aicc: fit.report.aicc,
			parameters: parameterText(fit),
			options: JSON.stringify(fit.request.options),
			excluded: exclusionText(fit),
			by: people.find((p) => p.id === fit.createdById)?.name ?? 'somebody who has left',
			at: fit.createdAt,
			engineVersion: fit.engineVersion,
			seed: fit.seed,
			used: fit.id === used
		};
	});
}

function windowLines(window: WindowResult): string[] {
	const result = window.result as Partial<FirstFormResult>;
	return [
		result.summary,
		...(result.criteria ?? []).map((c) => c.sentence),
		result.hold?.sentence,
		...(result.maxima ?? []).map((m) => m.sentence),
		...(result.notes ?? []).map((n) => n.message)
	].filter((line): line is string => typeof line === 'string' && line !== '');
}

async function auditExtract(studyId: string): Promise<WorkbookInput['audit']> {
	const where = { studyId };
	const [total, rows] = await Promise.all([
		AuditEvent.count({ where }),
		AuditEvent.findAll({ where, order: [['seq', 'DESC']], limit: AUDIT_LIMIT })
	]);
	const lines = rows.reverse().map((r): AuditLine => ({
		seq: r.seq,
		at: r.at,
		printedName: r.printedName,
		role: r.role,
		source: r.source,
		type: r.type,
		objectType: r.objectType,
		objectVersion: r.objectVersion,
		payload: r.payload,
		reason: r.reason,
		prevHash: r.prevHash,
		hash: r.hash
	}));
	return { filter: 'every entry on this study, newest kept where there are more than 5 000', total, lines };
}

/** Reads all that one workbook says, before the first cell is written. */
export async function collectWorkbook(view: RecipeView, exportedBy: string): Promise<WorkbookInput> {
	const fit = await Fit.findByPk(view.fit.id, { rejectOnEmpty: true });
	const runs = await fitRuns(fit.id);
	const revisions = await RunRevision.findAll({ where: { id: runs.map((r) => r.revisionId) } });
	const [group, received, used, fits, windows, audit, criteria] = await Promise.all([
		Group.findByPk(view.recipe.groupId, { rejectOnEmpty: true }),
		receivedFiles(revisions),
		usedRuns(runs, revisions),
		fitLines(view.study.id, fit.id),
		WindowResult.findAll({ where: { fitId: fit.id }, order: [['number', 'ASC']] }),
		auditExtract(view.study.id),
		criteriaOf(view.study.id)
	]);
	const { SITE_NAME, SITE_TIME_ZONE } = settings();
	return {
		site: { name: SITE_NAME, timeZone: SITE_TIME_ZONE, softwareVersion: SOFTWARE_VERSION },
		exported: { by: exportedBy, at: new Date() },
		group: { name: group.name, gxp: group.gxp },
		study: { name: view.study.name, decision: view.study.decision, criteria },
		recipe: view.recipe,
		shown: view.shown,
		versions: view.versions,
		difference: view.difference,
		comments: view.comments,
		fit: { number: fit.number, request: fit.request, report: fit.report, inputHash: fit.inputHash },
		labels: runs.map((r) => `Run ${r.number}`),
		received,
		used,
		fits,
		windows: windows.map((w) => ({ number: w.number, at: w.createdAt, lines: windowLines(w) })),
		audit
	};
}
