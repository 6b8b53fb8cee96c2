import { HyperFormula } from 'hyperformula';
import { describe, expect, it } from 'vitest';
import { SystemBuilder } from './bench/families';
import { formulas } from './formulas';
import { solve } from './solve';

const perHour = (k: number) => k / 3600;

/** Works out a formula in an independent spreadsheet engine, with the time in A2. */
function sheetValue(formula: string, timeCell: number): number {
	const sheet = HyperFormula.buildFromArray([[formula], [timeCell]], { licenseKey: 'gpl-v3' });
	return Number(sheet.getCellValue({ sheet: 0, row: 0, col: 0 }));
}

describe('formulas of the curves', () => {
	it('writes distinct modes as exponentials, upstream term first dropped where it is zero', () => {
		const system = new SystemBuilder(3)
			.step(0, [[1, 1]], perHour(1.2))
			.step(1, [[2, 1]], perHour(0.15))
			.build();
		const [a, b] = formulas(solve(system, [1, 0, 0]), { timeUnit: 'h', symbols: ['A', 'B', 'C'] });
		expect(a.text).toBe('[A](t) = e^(−1.2 t)');
		expect(b.text).toBe('[B](t) = 1.143 e^(−0.15 t) − 1.143 e^(−1.2 t)');
		expect(a.latex).toBe('\\left[\\mathrm{A}\\right](t) = e^{-1.2\\,t}');
	});

	it('writes equal coupled constants as a polynomial times one exponential', () => {
		const k = perHour(0.5);
		const system = new SystemBuilder(4)
			.step(0, [[1, 1]], k)
			.step(1, [[2, 1]], k)
			.step(2, [[3, 1]], k)
			.build();
		const [, b, c, d] = formulas(solve(system, [1, 0, 0, 0]), {
			timeUnit: 'h',
			symbols: ['A', 'B', 'C', 'D']
		});
		expect(b.text).toBe('[B](t) = 0.5 t e^(−0.5 t)');
		expect(c.text).toBe('[C](t) = 0.125 t² e^(−0.5 t)');
		expect(d.text).toBe('[D](t) = 1 + (−1 − 0.5 t − 0.125 t²) e^(−0.5 t)');
	});

	it('writes the defective A → B ⇌ C with 0.4, 0.3, 0.1 1/h with its (a + b t) e^(−kt)', () => {
		const system = new SystemBuilder(3)
			.step(0, [[1, 1]], perHour(0.4))
			.step(1, [[2, 1]], perHour(0.3), perHour(0.1))
			.build();
		const [, b] = formulas(solve(system, [1, 0, 0]), { timeUnit: 'h', symbols: ['A', 'B', 'C'] });
		expect(b.text).toBe('[B](t) = 0.25 + (−0.25 + 0.3 t) e^(−0.4 t)');
	});

	it('writes a complex pair as damped cosine and sine', () => {
		const k = perHour(1);
		const system = new SystemBuilder(3)
			.step(0, [[1, 1]], k)
			.step(1, [[2, 1]], k)
			.step(2, [[0, 1]], k)
			.build();
		const [a, b] = formulas(solve(system, [1, 0, 0]), { timeUnit: 'h', symbols: ['A', 'B', 'C'] });
		expect(a.text).toBe('[A](t) = 0.3333 + 0.6667 cos(0.866 t) e^(−1.5 t)');
		expect(b.text).toBe('[B](t) = 0.3333 + (−0.3333 cos(0.866 t) + 0.5774 sin(0.866 t)) e^(−1.5 t)');
	});

	it('gives spreadsheet cells that recalculate to the curve', () => {
		const system = new SystemBuilder(4)
			.step(0, [[1, 1]], perHour(0.4))
			.step(1, [[2, 1]], perHour(0.3), perHour(0.1))
			.step(2, [[3, 1]], perHour(0.02))
			.build();
		const solution = solve(system, [0.8, 0.1, 0, 0]);
		for (const hours of [0.1, 2.5, 40]) {
			const truth = solution.at(hours * 3600);
			formulas(solution, { timeUnit: 'h' }).forEach(({ spreadsheet }, s) =>
				expect(Math.abs(sheetValue(spreadsheet, hours) - truth[s])).toBeLessThan(1e-11)
			);
		}
	});

	it('says so where no formula can be given', () => {
		const builder = new SystemBuilder(12);
		for (let i = 0; i < 11; i++) builder.step(i, [[i + 1, 1]], 1 + 0.03 * i);
		const all = formulas(solve(builder.build(), [1, ...new Array<number>(11).fill(0)]), { timeUnit: 's' });
		const last = all[11];
		expect(last.error).toBeGreaterThan(1e-11);
		expect(last.note).not.toBeNull();
		expect(all[0].text).toBe('[c1](t) = e^(−1 t)');
	});
});
