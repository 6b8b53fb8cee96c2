import { describe, expect, it } from 'vitest';
import { clockAt, clockHours, workingWindows } from './working-hours';

const day = { start: '09:00', from: '08:00', to: '17:00' };

describe('working hours', () => {
	it('become spans of elapsed time from the start of the run', () => {
		expect(workingWindows(day, 0, 30, 'h')).toEqual([
			[0, 8],
			[23, 30]
		]);
		expect(workingWindows(day, 60, 300, 'min')).toEqual([[60, 300]]);
	});
	it('may go past midnight', () => {
		expect(workingWindows({ start: '23:00', from: '22:00', to: '06:00' }, 0, 24, 'h')).toEqual([
			[0, 7],
			[23, 24]
		]);
	});
	it('are none where the clock cannot be read', () => {
		expect(workingWindows({ ...day, from: '8' }, 0, 10, 'h')).toEqual([]);
		expect(clockHours('24:00')).toBeNull();
	});
	it('tell when a sample is due', () => {
		expect(clockAt('09:00', 2.5, 'h')).toBe('11:30');
		expect(clockAt('09:00', 23.25, 'h')).toBe('08:15, day 2');
	});
});
