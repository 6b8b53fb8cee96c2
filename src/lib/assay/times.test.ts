import { describe, expect, it } from 'vitest';
import { clockChangeBetween, zoneOffsetsMin } from './clock-changes';
import { clockText, daysToSeconds, readTimeText, secondsIn } from './times';
import { calendarToSerial } from './number-format';

const serial = (year: number, month: number, day: number, hour = 0, minute = 0) =>
	calendarToSerial({ year, month, day, hour, minute, second: 0 }, 1900);

describe('times as text', () => {
	it.each([
		['1.5', { kind: 'number', value: 1.5 }],
		['t=15', { kind: 'number', value: 15 }],
		['1:30', { kind: 'colon', parts: [1, 30] }],
		['25:00:30', { kind: 'colon', parts: [25, 0, 30] }],
		['90 min', { kind: 'worded', seconds: 5400, units: ['min'] }],
		['1 h 30 min', { kind: 'worded', seconds: 5400, units: ['h', 'min'] }],
		['1h30', { kind: 'worded', seconds: 5400 }],
		['2 d', { kind: 'worded', seconds: 172_800, units: ['d'] }],
		['09:40 PM', { kind: 'serial', days: (21 * 60 + 40) / 1440 }],
		['2026-12-01 09:40', { kind: 'stamp', days: serial(2026, 12, 1, 9, 40), orders: 'sure' }],
		['01.12.2026 09:40', { kind: 'stamp', days: serial(2026, 12, 1, 9, 40), orders: 'sure' }],
		['13/12/2026 09:40', { kind: 'stamp', days: serial(2026, 12, 13, 9, 40), orders: 'sure' }],
		[
			'03/04/2026',
			{ kind: 'stamp', days: serial(2026, 4, 3), otherDays: serial(2026, 3, 4), orders: 'either' }
		],
		['1-Dec-2026 09:40', { kind: 'stamp', days: serial(2026, 12, 1, 9, 40) }],
		['2026-12-01T09:40:00+02:00', { kind: 'stamp', utcOffsetMin: 120 }],
		['-', { kind: 'blank' }],
		['1:75', { kind: 'text' }],
		['soon', { kind: 'text' }]
	])('reads %s', (text, expected) => {
		expect(readTimeText(text, '.')).toMatchObject(expected);
	});

	it('brings serial days to whole milliseconds and seconds to the unit without dust', () => {
		expect(daysToSeconds(0.0104166666666667)).toBe(900);
		expect(secondsIn(daysToSeconds(0.0104166666666667), 'h')).toBe(0.25);
		expect(clockText(90_000)).toBe('25:00');
	});
});

describe('clock changes', () => {
	it('are known by zone: central Europe and the east of the United States in 2026', () => {
		// EU: last Sunday of October; USA: first Sunday of November.
		expect(zoneOffsetsMin(serial(2026, 10, 24, 12), 'Europe/Berlin')).toEqual([120]);
		expect(zoneOffsetsMin(serial(2026, 10, 25, 12), 'Europe/Berlin')).toEqual([60]);
		expect(zoneOffsetsMin(serial(2026, 11, 1, 12), 'America/New_York')).toEqual([-300]);
		expect(clockChangeBetween(serial(2026, 10, 24), serial(2026, 10, 26))).toContain('Europe/Berlin');
		expect(clockChangeBetween(serial(2026, 12, 1), serial(2026, 12, 5))).toEqual([]);
	});

	it('give two offsets in the hour that is doubled, and the one before in the hour that is skipped', () => {
		expect(zoneOffsetsMin(serial(2026, 10, 25, 2, 30), 'Europe/Berlin')).toEqual([120, 60]);
		expect(zoneOffsetsMin(serial(2026, 3, 29, 2, 30), 'Europe/Berlin')).toEqual([60]);
	});
});
