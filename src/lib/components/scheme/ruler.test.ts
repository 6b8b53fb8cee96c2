import { describe, expect, it } from 'vitest';
import { placeLabels, rulerScale } from './ruler';

describe('the time ruler', () => {
	it('covers modes and samples, from one full decade to another', () => {
		const scale = rulerScale([3143, 6364, 900, 86400], 3600);
		expect(scale.lowS).toBeLessThan(900);
		expect(scale.highS).toBeGreaterThan(86400);
		expect(scale.at(scale.lowS)).toBeCloseTo(0);
		expect(scale.at(scale.highS)).toBeCloseTo(1);
		expect(scale.at(3600)).toBeGreaterThan(scale.at(3143));
	});
	it('names the decades in the unit that a person would choose', () => {
		const words = rulerScale([100, 300000], 3600)
			.ticks.filter((t) => t.long)
			.map((t) => t.words);
		expect(words).toContain('36 s');
		expect(words).toContain('6 min');
		expect(words).toContain('1 h');
		expect(words).toContain('10 h');
	});
	it('is at least three decades long and holds what lies outside at its ends', () => {
		const scale = rulerScale([], 60);
		expect(Math.log10(scale.highS / scale.lowS)).toBeGreaterThanOrEqual(3);
		expect(scale.at(1e-30)).toBe(0);
		expect(scale.at(Infinity)).toBe(1);
	});
	it('keeps to decades when stiff schemes make it long', () => {
		const scale = rulerScale([1e-6, 1e6], 1);
		expect(scale.ticks.every((t) => t.long)).toBe(true);
	});
	it('puts labels that would overlap on another side or row', () => {
		const placed = placeLabels(
			[
				{ x: 400, width: 150 },
				{ x: 420, width: 150 },
				{ x: 430, width: 150 }
			],
			900
		);
		const spans = placed.map((p) => ({
			row: p.row,
			from: p.side === 'left' ? p.x - 160 : p.x,
			to: p.side === 'left' ? p.x : p.x + 160
		}));
		for (let i = 0; i < 3; i++)
			for (let j = i + 1; j < 3; j++)
				if (spans[i].row === spans[j].row)
					expect(spans[i].to <= spans[j].from || spans[j].to <= spans[i].from).toBe(true);
	});
});
