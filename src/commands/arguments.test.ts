import { describe, expect, it } from 'vitest';
import { readArguments, UsageError } from './arguments';

const known = { values: ['email', 'days'], flags: ['password-stdin'] };
const read = (...argv: string[]) => readArguments(argv, known, 'Usage: …');

describe('command line arguments', () => {
	it('takes a value after the name or after an equals sign', () => {
		expect(read('--email', 'a@b.example', '--days=3').values).toEqual({ email: 'a@b.example', days: '3' });
	});
	it('keeps an equals sign inside a value', () => {
		expect(read('--email=a=b@c.example').values.email).toBe('a=b@c.example');
	});
	it('takes a flag without a value', () => {
		expect(read('--password-stdin').flags.has('password-stdin')).toBe(true);
	});
	it('refuses an option that it does not know, naming it', () => {
		expect(() => read('--mail', 'a')).toThrow(/There is no option "--mail"/);
		expect(() => read('stray')).toThrow(UsageError);
	});
	it('refuses a name whose value is missing', () => {
		expect(() => read('--email')).toThrow(/--email needs a value/);
		expect(() => read('--email', '--days', '3')).toThrow(/--email needs a value/);
	});
});
