/** Times told by the names of samples: "RS-112_t=30 min", "IPC 2 h", "T0". Read only where no column is headed as time, and asked about (B1). */
import type { Decimal } from './numbers';
import { readTimeText, type TimeReading } from './times';

/** The last time in a name, with its unit; "t=0" and "T0" need none. */
const AT_END =
	/(?:^|[\s_;,:(@=-])(?:t\s*[=:_]?\s*)?(\d+(?:[.,]\d+)?\s*(?:s|sec|min|mins|minutes|h|hr|hrs|hours?|std|d|days?)\.?(?:\s*\d+\s*min)?)\)?$/i;
const ZERO = /(?:^|[\s_;,:(-])(?:t\s*[=:_]?\s*0|start|beginn|d[ée]but)(?:\s*(?:s|min|h|d))?\)?$/i;

export function timeInName(name: string, decimal: Decimal | null): TimeReading | null {
	const text = name.trim();
	if (text.length > 60) return null;
	if (ZERO.test(text)) return { kind: 'worded', seconds: 0, units: [], text };
	const match = AT_END.exec(text);
	if (!match) return null;
	const reading = readTimeText(match[1], decimal);
	return reading.kind === 'worded' ? { ...reading, text } : null;
}
