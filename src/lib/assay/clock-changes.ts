/** Changes of the clocks: the offsets that a wall-clock time may mean in a time zone. */

/**
 * Offsets of a zone from UTC in minutes that a wall-clock time, given as serial days, can have: one as a rule; two, the earlier
 * moment first, in the hour that a clock change doubles. In the hour that it skips the offset before the change holds.
 */
export function zoneOffsetsMin(days: number, zone: string): number[] {
	const wallMs = Math.round((days - 25_569) * 86_400_000);
	const [before, after] = [offsetAt(wallMs - 86_400_000, zone), offsetAt(wallMs + 86_400_000, zone)];
	const valid = [...new Set([before, after])].filter(
		(offset) => offsetAt(wallMs - offset * 60_000, zone) === offset
	);
	return valid.length > 0 ? valid.sort((a, b) => b - a) : [before];
}

function offsetAt(utcMs: number, zone: string): number {
	const parts = new Intl.DateTimeFormat('en-US', {
		timeZone: zone,
		hourCycle: 'h23',
		year: 'numeric',
		month: 'numeric',
		day: 'numeric',
		hour: 'numeric',
		minute: 'numeric',
		second: 'numeric'
	}).formatToParts(new Date(utcMs));
	const get = (type: string) => Number(parts.find((p) => p.type === type)?.value ?? 0);
	const wall = Date.UTC(get('year'), get('month') - 1, get('day'), get('hour'), get('minute'), get('second'));
	return Math.round((wall - utcMs) / 60_000);
}

/** Zones that stand for the clock-change rules in use; one of them changing between two stamps is reason to ask. */
const WATCHED = [
	'Europe/Berlin',
	'America/New_York',
	'Australia/Sydney',
	'America/Santiago',
	'Pacific/Auckland',
	'Africa/Cairo',
	'Asia/Jerusalem'
];

export function clockChangeBetween(firstDays: number, lastDays: number): string[] {
	if (!(lastDays > firstDays) || lastDays - firstDays > 366) return [];
	return WATCHED.filter((zone) => zoneOffsetsMin(firstDays, zone)[0] !== zoneOffsetsMin(lastDays, zone)[0]);
}
