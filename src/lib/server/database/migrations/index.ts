import type { QueryInterface } from 'sequelize';
import type { RunnableMigration } from 'umzug';

interface Migration {
	up(q: QueryInterface): Promise<void>;
	down?(q: QueryInterface): Promise<void>;
}

// Bundled by Vite in dev, build and tests alike: no looking for files at run time.
const files = import.meta.glob<Migration>('./2*.ts', { eager: true });

export const migrations: RunnableMigration<QueryInterface>[] = Object.entries(files)
	.sort(([a], [b]) => a.localeCompare(b))
	.map(([path, migration]) => ({
		name: path.replace(/^\.\/|\.ts$/g, ''),
		up: ({ context }) => migration.up(context),
		down: migration.down ? ({ context }) => migration.down!(context) : undefined
	}));
