import { at, literal, on, type SheetWriter } from '../sheet-writer';
import { SHEETS, type Layout } from '../layout';
import type { PlanDirection, PlanRun, RecalculationPlan } from '../plan';

/** Species, steps, and for each run its constants and rate matrix as formulas from the cells of "Parameters". */
export function writeScheme(sheet: SheetWriter, plan: RecalculationPlan, layout: Layout): void {
	const { request, runs } = plan;
	sheet.heading(1, 'Scheme');
	sheet.note(2, 'dc/dt = K c. K and every constant below are formulas of the cells on "Parameters".');
	let row = sheet.table(
		4,
		['Species', 'Name', 'Role', 'Molar mass, g/mol'],
		request.species.map((s) => [s.id, s.name, s.role ?? '', s.molarMassGPerMol])
	);
	row = sheet.table(
		row + 1,
		['Step', 'Reaction', 'Law', 'Excess'],
		runs.length === 0
			? []
			: runs[0].directions.map((d) => [
					`${d.step} ${d.sense}`,
					d.label,
					d.throughEquilibrium !== null ? 'through K' : d.eyring ? 'Eyring' : 'Arrhenius',
					d.excess.map((e) => `[${e.species}]^${literal(e.order)}`).join(' ')
				])
	);
	for (const run of runs) row = writeRun(sheet, plan, run, row + 1, layout);
	sheet.finish();
}

function writeRun(
	sheet: SheetWriter,
	plan: RecalculationPlan,
	run: PlanRun,
	row: number,
	layout: Layout
): number {
	sheet.heading(row, `${run.label}: constants and rate matrix, 1/${run.timeUnit}`);
	sheet.row(row + 1, ['Temperature', run.temperatureK, 'K', 'Seconds per unit of time', run.secondsPerUnit]);
	sheet.text(row + 2, 1, '1/T − 1/Tref');
	const temperature = at(row + 1, 2);
	const reference = layout.si.get('reference temperature') ?? '0';
	sheet.formula(row + 2, 2, `1/${temperature}-1/${reference}`, 1 / run.temperatureK - 1 / plan.referenceK);
	sheet.text(row + 2, 3, '1/K');
	const cells = { temperature, gap: at(row + 2, 2), seconds: at(row + 1, 5), reference };
	sheet.header(row + 3, ['Step', 'Constant', 'Unit', 'Reaction', 'Excess, mol/L']);
	const first = row + 4;
	const cellOf = (i: number) => at(first + i, 2);
	run.directions.forEach((d, i) => {
		sheet.text(first + i, 1, `${d.step} ${d.sense}`);
		d.excess.forEach((e, k) => sheet.number(first + i, 5 + k, e.molPerL));
		sheet.formula(first + i, 2, constantFormula(d, first + i, cells, cellOf, layout), d.constant);
		sheet.text(first + i, 3, `1/${run.timeUnit}`);
		sheet.text(first + i, 4, d.label);
	});
	const top = first + run.directions.length + 1;
	writeMatrix(sheet, plan, run, top, cellOf);
	layout.runs.push({
		matrix: { row: top + 1, column: 2 },
		charge: [],
		concentration: [],
		time: []
	});
	return top + 2 + plan.species.length;
}

interface RunCells {
	temperature: string;
	gap: string;
	seconds: string;
	reference: string;
}

function constantFormula(
	d: PlanDirection,
	row: number,
	cells: RunCells,
	cellOf: (i: number) => string,
	layout: Layout
): string {
	const si = layout.si.get(d.constantId) ?? '0';
	const gas = layout.si.get('gas constant') ?? '1';
	const energy = d.energyId === null ? null : layout.si.get(d.energyId);
	const thermal = energy ? `*EXP(-${energy}/${gas}*${cells.gap})` : '';
	if (d.throughEquilibrium !== null) return `${cellOf(d.throughEquilibrium)}/(${si}${thermal})`;
	const eyring = d.eyring ? `*${cells.temperature}/${cells.reference}` : '';
	const excess = d.excess.map((e, k) => `*${at(row, 5 + k)}^${literal(e.order)}`).join('');
	return `${si}${thermal}${eyring}${excess}*${cells.seconds}`;
}

function writeMatrix(
	sheet: SheetWriter,
	plan: RecalculationPlan,
	run: PlanRun,
	top: number,
	cellOf: (i: number) => string
): void {
	sheet.header(top, ['K', ...plan.species.map((s) => `from ${s}`)]);
	plan.species.forEach((species, to) => {
		sheet.text(top + 1 + to, 1, `to ${species}`);
		plan.species.forEach((_, from) => {
			const terms = run.directions.flatMap((d, i) => {
				if (d.from !== from) return [];
				const into = d.products
					.filter((p) => p.to === to)
					.map((p) => `+${p.coefficient === 1 ? '' : `${literal(p.coefficient)}*`}${cellOf(i)}`);
				return to === from ? [...into, `-${cellOf(i)}`] : into;
			});
			if (terms.length === 0) sheet.number(top + 1 + to, 2 + from, 0);
			else sheet.formula(top + 1 + to, 2 + from, terms.join('').replace(/^\+/, ''), run.matrix[to][from]);
		});
	});
}

/** Row `i` of K of a run on "Scheme". */
export function matrixRow(layout: Layout, run: number, i: number, n: number): string {
	const { row, column } = layout.runs[run].matrix;
	return on(SHEETS.scheme, `${at(row + i, column)}:${at(row + i, column + n - 1)}`);
}
export function matrixCell(layout: Layout, run: number, i: number, j: number): string {
	const { row, column } = layout.runs[run].matrix;
	return on(SHEETS.scheme, at(row + i, column + j));
}
