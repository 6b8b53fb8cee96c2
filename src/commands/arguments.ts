/** What was typed wrong, and how it is typed right; shown without a stack trace. */
export class UsageError extends Error {}

/** `--name value` pairs and bare `--flags`, checked against the names that a command knows. */
export function readArguments(
	argv: string[],
	known: { values: string[]; flags: string[] },
	usage: string
): { values: Record<string, string>; flags: Set<string> } {
	const values: Record<string, string> = {};
	const flags = new Set<string>();
	for (let i = 0; i < argv.length; i++) {
		const [name, inline] = splitOnce(argv[i]);
		if (known.flags.includes(name) && inline === undefined) flags.add(name);
		else if (known.values.includes(name)) {
			const value = inline ?? argv[++i];
			if (value === undefined || (inline === undefined && value.startsWith('--')))
				throw new UsageError(`--${name} needs a value.\n\n${usage}`);
			values[name] = value;
		} else throw new UsageError(`There is no option "${argv[i]}".\n\n${usage}`);
	}
	return { values, flags };
}

function splitOnce(argument: string): [string, string | undefined] {
	const bare = argument.replace(/^--/, '');
	if (bare === argument) return [`(${argument})`, undefined];
	const at = bare.indexOf('=');
	return at < 0 ? [bare, undefined] : [bare.slice(0, at), bare.slice(at + 1)];
}

/** Ends a command: its message on stderr, so that stdout holds the result alone. */
export function reportAndExit(error: unknown): never {
	const message = error instanceof Error ? error.message : String(error);
	process.stderr.write(`\n${message}\n\n`);
	process.exit(1);
}
