/** Working hours as spans of a run's elapsed time, and elapsed times as the clock shows them. */

export interface WorkingHours {
	/** Clock time at time zero, "09:00". */
	start: string;
	/** Hours in which samples can be taken, "08:00" to "17:00"; past midnight when the second is earlier. */
	from: string;
	to: string;
}

const SECONDS: Record<string, number> = { s: 1, min: 60, h: 3600, d: 86400 };
const DAY = 24;

/** "09:30" in hours; null for anything else. */
export function clockHours(text: string): number | null {
	const match = /^(\d{1,2}):(\d{2})$/.exec(text.trim());
	if (!match) return null;
	const [hours, minutes] = [Number(match[1]), Number(match[2])];
	return hours < 24 && minutes < 60 ? hours + minutes / 60 : null;
}

/** Spans of elapsed time within working hours, day after day, cut at `earliest` and `latest`; all in the run's time unit. */
export function workingWindows(
	hours: WorkingHours,
	earliest: number,
	latest: number,
	timeUnit: string
): [number, number][] {
	const [start, from, to] = [hours.start, hours.from, hours.to].map(clockHours);
	if (start === null || from === null || to === null || from === to) return [];
	const length = (to - from + DAY) % DAY;
	const unit = SECONDS[timeUnit] / 3600;
	const spans: [number, number][] = [];
	const lastHour = latest * unit;
	for (let day = -1; day * DAY <= lastHour + DAY; day++) {
		const begin = (from - start + day * DAY) / unit;
		const low = Math.max(begin, earliest);
		const high = Math.min(begin + length / unit, latest);
		if (high > low) spans.push([low, high]);
	}
	return spans;
}

/** Elapsed time as clock time, with the day when it is not the first: "11:30", "08:15, day 2". */
export function clockAt(start: string, time: number, timeUnit: string): string | null {
	const zero = clockHours(start);
	if (zero === null) return null;
	const minutes = Math.round(zero * 60 + (time * SECONDS[timeUnit]) / 60);
	const day = Math.floor(minutes / (DAY * 60));
	const within = minutes - day * DAY * 60;
	const two = (n: number) => String(n).padStart(2, '0');
	return `${two(Math.floor(within / 60))}:${two(within % 60)}${day ? `, day ${day + 1}` : ''}`;
}
