import { at, literal, span, type SheetWriter } from '../sheet-writer';
import { SHEETS, TOLERANCE, type Layout } from '../layout';
import type { PlanRun, RecalculationPlan } from '../plan';
import { matrixRow } from './scheme';

/** One basis function of the closed form: t^m e^{re t}, with cos or sin for a complex pair. */
interface Basis {
	kind: 'exp' | 'cos' | 'sin';
	power: number;
	re: number;
	im: number;
	amplitudes: number[];
}

/** The engine's modes in the time unit of the run: rates times, amplitudes of t^m times the unit's seconds to the m. */
export function basisOf(run: PlanRun): Basis[] {
	const u = run.secondsPerUnit;
	return run.modes.flatMap((mode): Basis[] => {
		const re = mode.re * u;
		const im = mode.im * u;
		const amplitude = (index: number, power: number) =>
			Array.from(mode.amplitudes[index] ?? [], (a) => a * u ** power);
		if (mode.im === 0)
			return mode.amplitudes.map((_, m) => ({
				kind: 'exp',
				power: m,
				re,
				im: 0,
				amplitudes: amplitude(m, m)
			}));
		return mode.amplitudes.map((_, i) => {
			const power = Math.floor(i / 2);
			return { kind: i % 2 === 0 ? 'cos' : 'sin', power, re, im, amplitudes: amplitude(i, power) };
		});
	});
}

export function basisValue(b: Basis, t: number): number {
	const trig = b.kind === 'exp' ? 1 : b.kind === 'cos' ? Math.cos(b.im * t) : Math.sin(b.im * t);
	return t ** b.power * Math.exp(b.re * t) * trig;
}

/**
 * The engine's closed form: stored rates and coefficients, evaluated live, held against K (the eigen-equation), against the
 * charge, and against the sheet "Verify", which knows the rate constants alone.
 */
export function writeCurves(sheet: SheetWriter, plan: RecalculationPlan, layout: Layout): void {
	sheet.heading(1, 'Curves: the closed form');
	sheet.note(
		2,
		'c(t) = sum of coefficient × EXP(rate × t), with t^m for repeated and COS/SIN for complex modes. Rates and coefficients are those of the stored constants; "from K" follows the cells on "Parameters".'
	);
	const checks: string[] = [];
	let row = 5;
	plan.runs.forEach((run, r) => {
		if (!run.logged) row = writeRun(sheet, plan, run, r, row, layout, checks) + 1;
	});
	const agrees = true;
	sheet.text(3, 1, 'All agree');
	sheet.formula(3, 2, checks.length ? `AND(${checks.join(',')})` : 'TRUE()', agrees);
	layout.checks.push({ sheet: SHEETS.curves, cell: at(3, 2), agrees });
	sheet.finish();
}

/** Where rates differ by many decades both ways lose digits: the tolerance follows what each of them can hold. */
export function toleranceOf(run: PlanRun): number {
	return Math.max(TOLERANCE, 10 * run.errorEstimate, 2 ** run.ladder.squarings * 4e-15);
}

function writeRun(
	sheet: SheetWriter,
	plan: RecalculationPlan,
	run: PlanRun,
	r: number,
	top: number,
	layout: Layout,
	checks: string[]
): number {
	const n = plan.species.length;
	const basis = basisOf(run);
	const width = basis.length;
	const total = run.charge.reduce((sum, c) => sum + Math.abs(c.value), 0) || 1;
	const tolerance = toleranceOf(run);
	sheet.heading(top, `${run.label}, time in ${run.timeUnit} (method: ${run.method})`);
	sheet.row(top + 1, ['Tolerance, share of the charge', tolerance, 'Total charge, mol/L', total]);
	const limit = `${at(top + 1, 2)}*${at(top + 1, 4)}`;
	sheet.row(top + 2, [`Rate, 1/${run.timeUnit}`, ...basis.map((b) => b.re)]);
	sheet.row(top + 3, ['Frequency', ...basis.map((b) => b.im)]);
	sheet.row(top + 4, ['Power of t', ...basis.map((b) => b.power)]);
	sheet.row(top + 5, ['Function', ...basis.map((b) => b.kind)]);
	plan.species.forEach((s, i) =>
		sheet.row(top + 6 + i, [`Coefficient of ${s}`, ...basis.map((b) => b.amplitudes[i])])
	);
	const coefficients = (i: number) => span(top + 6 + i, 2, top + 6 + i, 1 + width);
	let row = top + 6 + n;
	row = writeEigenEquation(sheet, plan, run, r, row, { top, width, basis, limit, layout, checks });
	row = writeStart(sheet, plan, run, r, row, { top, basis, limit, layout, checks });
	return writeTimes(sheet, plan, run, r, row + 1, { top, basis, width, limit, coefficients, layout, checks });
}

/** K a_m = re a_m + (m+1) a_{m+1} ± im a_m of the partner: what the derivative of the closed form asks for. */
function writeEigenEquation(
	sheet: SheetWriter,
	plan: RecalculationPlan,
	run: PlanRun,
	r: number,
	row: number,
	at0: { top: number; width: number; basis: Basis[]; limit: string; layout: Layout; checks: string[] }
): number {
	const n = plan.species.length;
	const { top, basis, layout } = at0;
	sheet.text(row, 1, 'K a − λ a (to be zero)');
	const scale = Math.max(1e-300, ...run.matrix.flat().map(Math.abs));
	const next = (l: number) =>
		basis.findIndex(
			(b) =>
				b.re === basis[l].re &&
				b.im === basis[l].im &&
				b.kind === basis[l].kind &&
				b.power === basis[l].power + 1
		);
	const partner = (l: number) =>
		basis.findIndex(
			(b) =>
				b.re === basis[l].re && b.im === basis[l].im && b.kind !== basis[l].kind && b.power === basis[l].power
		);
	const cells: string[] = [];
	for (let i = 0; i < n; i++)
		basis.forEach((b, l) => {
			const cell = (species: number, column: number) => at(top + 6 + species, 2 + column);
			const column = span(top + 6, 2 + l, top + 5 + n, 2 + l);
			let formula = `SUM(MMULT(${matrixRow(layout, r, i, n)},${column}))-${at(top + 2, 2 + l)}*${cell(i, l)}`;
			let value = run.matrix[i].reduce((sum, k, j) => sum + k * b.amplitudes[j], 0) - b.re * b.amplitudes[i];
			const up = next(l);
			if (up >= 0) {
				formula += `-${b.power + 1}*${cell(i, up)}`;
				value -= (b.power + 1) * basis[up].amplitudes[i];
			}
			const other = partner(l);
			if (other >= 0) {
				const sign = b.kind === 'cos' ? '-' : '+';
				formula += `${sign}${at(top + 3, 2 + l)}*${cell(i, other)}`;
				value += (b.kind === 'cos' ? -1 : 1) * b.im * basis[other].amplitudes[i];
			}
			sheet.formula(row + i, 2 + l, formula, value);
			cells.push(at(row + i, 2 + l));
		});
	const area = span(row, 2, row + n - 1, 1 + at0.width);
	sheet.text(row + n, 1, 'Eigen-equation holds');
	sheet.formula(row + n, 2, `MAX(MAX(${area}),-MIN(${area}))<=${at0.limit}*${literal(scale)}`, true);
	at0.checks.push(at(row + n, 2));
	return row + n + 1;
}

/** The coefficients of the functions that are 1 at time zero add up to the charge. */
function writeStart(
	sheet: SheetWriter,
	plan: RecalculationPlan,
	run: PlanRun,
	r: number,
	row: number,
	at0: { top: number; basis: Basis[]; limit: string; layout: Layout; checks: string[] }
): number {
	const ones = at0.basis.flatMap((b, l) => (b.power === 0 && b.kind !== 'sin' ? [l] : []));
	sheet.text(row, 1, 'Sum of coefficients − charge');
	plan.species.forEach((_, i) => {
		const sum = ones.map((l) => at(at0.top + 6 + i, 2 + l)).join('+');
		const value = ones.reduce((s, l) => s + at0.basis[l].amplitudes[i], 0) - run.charge[i].value;
		sheet.formula(row, 2 + i, `${sum}-${at0.layout.runs[r].charge[i]}`, value);
	});
	const area = span(row, 2, row, 1 + plan.species.length);
	sheet.text(row + 1, 1, 'Starts at the charge');
	sheet.formula(row + 1, 2, `MAX(MAX(${area}),-MIN(${area}))<=${at0.limit}`, true);
	at0.checks.push(at(row + 1, 2));
	return row + 2;
}

function functionFormula(b: Basis, t: string, re: string, im: string): string {
	const power = b.power === 0 ? '' : b.power === 1 ? `${t}*` : `${t}^${b.power}*`;
	const trig = b.kind === 'exp' ? '' : `*${b.kind.toUpperCase()}(${im}*${t})`;
	return `${power}EXP(${re}*${t})${trig}`;
}

function writeTimes(
	sheet: SheetWriter,
	plan: RecalculationPlan,
	run: PlanRun,
	r: number,
	top: number,
	at0: {
		top: number;
		basis: Basis[];
		width: number;
		limit: string;
		coefficients: (i: number) => string;
		layout: Layout;
		checks: string[];
	}
): number {
	const n = plan.species.length;
	const { basis, width, layout } = at0;
	const result = 2;
	const live = result + n;
	const check = live + n;
	const functions = check + 1;
	sheet.header(top, [
		'Time from zero',
		...plan.species.map((s) => `${s}, closed form`),
		...plan.species.map((s) => `${s}, from K`),
		'Agrees',
		...basis.map((_, l) => `Function ${l + 1}`)
	]);
	run.times.forEach((time, k) => {
		const row = top + 1 + k;
		const t = Math.max(0, time + run.offset.value);
		sheet.formula(row, 1, layout.runs[r].time[k], t);
		const values = basis.map((b) => basisValue(b, t));
		basis.forEach((b, l) =>
			sheet.formula(
				row,
				functions + l,
				functionFormula(b, `$A${row}`, at(at0.top + 2, 2 + l), at(at0.top + 3, 2 + l)),
				values[l]
			)
		);
		for (let i = 0; i < n; i++) {
			const value = basis.reduce((sum, b, l) => sum + b.amplitudes[i] * values[l], 0);
			sheet.formula(
				row,
				result + i,
				`SUMPRODUCT(${at0.coefficients(i)},${span(row, functions, row, functions + width - 1)})`,
				value
			);
			sheet.formula(row, live + i, layout.runs[r].concentration[k][i], run.climbs[k].steps.at(-1)![i]);
		}
		const pairs = plan.species.map((_, i) => `ABS(${at(row, result + i)}-${at(row, live + i)})`).join(',');
		sheet.formula(row, check, `MAX(${pairs})<=${at0.limit}`, true);
	});
	if (run.times.length > 0) at0.checks.push(`AND(${span(top + 1, check, top + run.times.length, check)})`);
	return top + 1 + run.times.length;
}
