import { roundDown } from '$lib/recipe/rounding';
import { at, literal, type SheetWriter } from '../sheet-writer';
import { SHEETS, type Layout } from '../layout';
import type { WorkbookInput } from '../input';

/** What was decided: criteria, hold with its rounding as a live formula, and what the windows said. */
export function writeDecisions(sheet: SheetWriter, input: WorkbookInput, layout: Layout): void {
	const { content } = input.shown;
	sheet.heading(1, SHEETS.decisions);
	sheet.row(3, ['Decision', input.study.decision]);
	let row = sheet.table(
		5,
		['Species', 'Relation', 'Limit', 'Unit', 'Note'],
		content.criteria.map((c) => [c.species, c.relation, c.limit, c.unit, c.note])
	);
	row = writeHold(sheet, input, layout, row + 1);
	for (const window of input.windows) {
		sheet.heading(row + 1, `Window ${window.number} (${window.at.toISOString()})`);
		row += 2;
		for (const line of window.lines) sheet.text(row++, 1, line);
	}
	sheet.finish();
}

function writeHold(sheet: SheetWriter, input: WorkbookInput, layout: Layout, row: number): number {
	const { hold } = input.shown.content;
	if (!hold) return row;
	sheet.heading(row, 'Hold time');
	sheet.row(row + 1, ['From the estimates', hold.nominal, hold.unit]);
	sheet.row(row + 2, ['At the one-sided bound', hold.bound, hold.unit]);
	const used = hold.bound ?? hold.nominal;
	const source = at(hold.bound !== null ? row + 2 : row + 1, 2);
	sheet.text(row + 3, 1, 'Rounded down');
	if (used !== null && used > 0)
		// The factor absorbs binary fractions just below a whole digit, as the service's own rounding does.
		sheet.formula(
			row + 3,
			2,
			`ROUNDDOWN(${source}*(1+${literal(1e-10)}),1-INT(LOG10(${source})))`,
			roundDown(used)
		);
	sheet.row(row + 4, ['Stated on the recipe', hold.stated, hold.unit]);
	sheet.row(row + 5, ['Basis', hold.basis]);
	sheet.text(row + 6, 1, 'Stated is not above rounded');
	if (used !== null && used > 0 && hold.stated !== null) {
		const agrees = hold.stated <= roundDown(used) * (1 + 1e-9);
		sheet.formula(row + 6, 2, `${at(row + 4, 2)}<=${at(row + 3, 2)}*(1+${literal(1e-9)})`, agrees);
		layout.checks.push({ sheet: SHEETS.decisions, cell: at(row + 6, 2), agrees });
	}
	return row + 7;
}

/** The recipe in the order of ISA-88: header, formula, equipment requirements, procedure, other information. */
export function writeRecipe(sheet: SheetWriter, input: WorkbookInput): void {
	const { content, charges, number, state } = input.shown;
	sheet.heading(1, `Master recipe ${content.title}, version ${number} (${state})`);
	sheet.row(2, ['Target', content.target]);
	let row = 4;
	const section = (title: string, header: string[], rows: Parameters<SheetWriter['table']>[2]) => {
		if (rows.length === 0) return;
		sheet.heading(row, title);
		row = sheet.table(row + 1, header, rows) + 1;
	};
	const range = (r: [number | null, number | null] | null) => [r?.[0] ?? null, r?.[1] ?? null];
	section(
		'Set-points',
		[
			'Parameter',
			'Set-point',
			'Unit',
			'NOR from',
			'NOR to',
			'PAR from',
			'PAR to',
			'Studied from',
			'Studied to',
			'Limit that binds'
		],
		content.setPoints.map((p) => [
			p.parameter,
			p.value,
			p.unit,
			...range(p.nor),
			...range(p.par),
			...range(p.studied),
			p.binds
		])
	);
	section(
		`Charges at ${content.scale.value} ${content.scale.unit}`,
		['Material', 'Role', 'Equivalents', 'Amount, mol', 'Mass, kg', 'Volume, L', 'Fill up to, L', 'Not known'],
		content.charges.map((line) => {
			const f = charges.lines.find((l) => l.id === line.id);
			return [
				line.material,
				line.role,
				f?.equivalents,
				f?.amountMol,
				f?.massKg,
				f?.volumeL,
				f?.fillToL,
				f?.missing.join('; ')
			];
		})
	);
	section(
		'Equipment requirements',
		['Requirement'],
		content.equipment.map((e) => [e.text])
	);
	section(
		'Procedure',
		[
			'No.',
			'Unit procedure',
			'Operation',
			'Text',
			'Duration, min',
			'At most, min',
			'From, °C',
			'To, °C',
			'Phases'
		],
		content.procedure.map((o, i) => [
			i + 1,
			o.unitProcedure,
			o.kind,
			o.text,
			o.durationMin,
			o.maxDurationMin,
			o.fromC,
			o.toC,
			o.phases.join('; ')
		])
	);
	section(
		'In-process controls',
		['Test', 'Limit', 'At, min', 'Turnaround, min', 'If not met'],
		content.ipc.map((c) => [c.test, c.limit, c.atMin, c.lagMin, c.ifNotMet])
	);
	section(
		'Hazard statements, as on the supplier’s safety data sheet',
		['Product', 'Supplier', 'Revision date', 'Signal word', 'Code', 'Statement'],
		content.hazards.flatMap((h) =>
			(h.statements.length ? h.statements : [{ code: '', text: 'no statement entered' }]).map((s) => [
				h.product,
				h.supplier,
				h.revisionDate,
				h.signalWord,
				s.code,
				s.text
			])
		)
	);
	if (content.other) section('Other information', [''], [[content.other]]);
	sheet.finish();
}
