import { STATE_NAMES } from '$lib/recipe/states';
import type { SheetWriter } from '../sheet-writer';
import { SHEETS } from '../layout';
import type { WorkbookInput } from '../input';
import { localTime } from './cover';

export function writeSignatures(sheet: SheetWriter, input: WorkbookInput): void {
	const { shown, site } = input;
	sheet.heading(1, SHEETS.signatures);
	sheet.note(2, `Signatures on version ${shown.number}. Each is on the hash of exactly this version.`);
	const end = sheet.table(
		4,
		['Meaning', 'Printed name', 'Person', 'UTC', 'Site time', 'Version hash', 'Comment', 'Confirmation run'],
		shown.signatures.map((s) => [
			s.meaning,
			s.printedName,
			s.userId,
			s.signedAt.toISOString(),
			localTime(s.signedAt, site.timeZone),
			s.contentHash,
			s.comment,
			s.confirmation
				? `Run ${s.confirmation.runNumber} (${s.confirmation.temperature.value} ${s.confirmation.temperature.unit}, not used in the fit): ${s.confirmation.inside} of ${s.confirmation.total} points inside the ${s.confirmation.level * 100} % prediction band`
				: ''
		])
	);
	if (shown.signatures.length === 0) sheet.note(end, 'Nobody has signed this version.');
	sheet.finish(4);
}

export function writeCautions(sheet: SheetWriter, input: WorkbookInput): void {
	sheet.heading(1, SHEETS.cautions);
	sheet.note(
		2,
		'Calculated from data that people entered; not a safety assessment. "Read by" tells who read a caution, not that anybody accepted it.'
	);
	sheet.table(
		4,
		[
			'Kind',
			'Caution',
			'What was found',
			'Why it matters',
			'What is not known',
			'Site rule',
			'Link',
			'Contact',
			'Read by'
		],
		input.shown.cautions.map((c) => [
			c.kind,
			c.title,
			c.found,
			c.why,
			c.unknown,
			c.rule ? `${c.rule.key} ${c.rule.title}` : 'none entered by the site',
			c.rule?.link ?? '',
			c.rule?.contact ?? '',
			c.readBy.map((r) => `${r.printedName} ${r.at.toISOString()}`).join('; ')
		])
	);
	sheet.finish(4);
}

export function writeVersions(sheet: SheetWriter, input: WorkbookInput): void {
	sheet.heading(1, SHEETS.versions);
	let row = sheet.table(
		3,
		['Version', 'State', 'Author', 'Reason for change', 'Last changed (UTC)'],
		input.versions.map((v) => [
			v.number,
			STATE_NAMES[v.state as keyof typeof STATE_NAMES],
			v.author,
			v.reason,
			v.updatedAt.toISOString()
		])
	);
	if (input.difference) {
		sheet.heading(row + 1, `Version ${input.shown.number} against version ${input.difference.with}`);
		row = sheet.table(
			row + 2,
			['Place', 'Before', 'After'],
			input.difference.places.map((d) => [d.place, d.from, d.to])
		);
	}
	if (input.comments.length > 0) {
		sheet.heading(row + 1, 'Review comments');
		sheet.table(
			row + 2,
			['By', 'At (UTC)', 'On', 'Comment'],
			input.comments.map((c) => [c.printedName, c.at.toISOString(), c.anchor, c.text])
		);
	}
	sheet.finish();
}

/** Every fit of the study, kept or not: nothing that was tried is left out. */
export function writeFits(sheet: SheetWriter, input: WorkbookInput): void {
	sheet.heading(1, 'All fits of the study');
	sheet.note(2, 'Every fit that was run, whether it was used or not.');
	sheet.table(
		4,
		[
			'Fit',
			'Used here',
			'Status',
			'Scheme',
			'Runs',
			'Values',
			'Weighted SSR',
			's',
			'AICc',
			'Parameters',
			'Options',
			'Excluded values',
			'By',
			'At (UTC)',
			'Engine',
			'Seed'
		],
		input.fits.map((f) => [
			f.number,
			f.used ? 'yes' : '',
			f.status,
			f.scheme,
			f.runs,
			f.pointsUsed,
			f.weightedSsr,
			f.s,
			f.aicc,
			f.parameters,
			f.options,
			f.excluded,
			f.by,
			f.at.toISOString(),
			f.engineVersion,
			f.seed
		])
	);
	sheet.finish(4);
}

export function writeAudit(sheet: SheetWriter, input: WorkbookInput): void {
	const { lines, total, filter } = input.audit;
	sheet.heading(1, SHEETS.audit);
	sheet.note(2, `Filter: ${filter}. ${lines.length} of ${total} entries.`);
	sheet.row(3, ['First hash', lines[0]?.hash ?? '', 'Last hash', lines.at(-1)?.hash ?? '']);
	sheet.table(
		5,
		[
			'No.',
			'UTC',
			'Name',
			'Role',
			'Source',
			'Entry',
			'Object',
			'Version',
			'Content',
			'Reason',
			'Hash before',
			'Hash'
		],
		lines.map((l) => [
			l.seq,
			l.at,
			l.printedName,
			l.role,
			l.source,
			l.type,
			l.objectType,
			l.objectVersion,
			l.payload,
			l.reason,
			l.prevHash,
			l.hash
		])
	);
	sheet.finish(5);
}

const GLOSSARY: [string, string][] = [
	[
		'First order',
		'Every step is first order in its reactant; reagents in excess are held constant within a run.'
	],
	[
		'Studied range',
		'Temperatures, charges and times that the runs behind the fit cover. Outside it the curves rest on the rate law alone.'
	],
	['95 % interval', 'From the standard error and the t distribution with the degrees of freedom of the fit.'],
	['s', 'Residual standard error: square root of the weighted sum of squares over the degrees of freedom.'],
	[
		'Hold time',
		'Rounded down to two significant digits from the adverse one-sided bound where one was computed.'
	],
	[
		'NOR',
		'Normal operating range: what the plant is expected to keep. Industry usage, not an ICH definition.'
	],
	[
		'PAR',
		'Proven acceptable range: the range of one parameter with the others constant (ICH Q8(R2)). Several of them together are not a design space.'
	],
	[
		'Prediction band',
		'Where a single new measurement is expected; wider than the confidence band of the curve.'
	],
	[
		'Validated',
		'The kinetics predicted an unused run and a group lead who wrote none of it signed this version. Not process validation.'
	],
	[
		'Limits of impurities',
		'Limits here are those of this stage. ICH Q3A thresholds concern the drug substance.'
	]
];

export function writeAssumptions(sheet: SheetWriter, input: WorkbookInput): void {
	sheet.heading(1, 'Assumptions, limits and words');
	let row = sheet.table(3, ['Word', 'Meaning'], GLOSSARY);
	const { findings } = input.fit.report;
	if (findings.length > 0) {
		sheet.heading(row + 1, `Findings of fit ${input.fit.number}`);
		row = sheet.table(
			row + 2,
			['Level', 'Code', 'Finding'],
			findings.map((f) => [f.level, f.code, f.message])
		);
	}
	if (input.shown.content.justification) {
		sheet.heading(row + 1, 'Justification');
		sheet.text(row + 2, 1, input.shown.content.justification);
	}
	sheet.finish();
}
