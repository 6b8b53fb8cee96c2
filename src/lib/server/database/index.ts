import { AsyncLocalStorage } from 'node:async_hooks';
import { mkdirSync } from 'node:fs';
import { dirname } from 'node:path';
import { Sequelize, Transaction } from 'sequelize';
import sqlite3 from 'sqlite3';
import { SequelizeStorage, Umzug } from 'umzug';
import { settings } from '../settings';
import { migrations } from './migrations';
import { initModels } from './models';

export type Tx = Transaction;

export interface Database {
	sequelize: Sequelize;
	/**
	 * Runs one write transaction (BEGIN IMMEDIATE), one after the other within this process.
	 * Every query inside must be given the transaction. Never nest.
	 */
	write<T>(work: (tx: Tx) => Promise<T>): Promise<T>;
	close(): Promise<void>;
}

type Connection = sqlite3.Database & { prepared?: Promise<void> };

/** Without a callback the driver throws a failure (the file is no database, the disk is full) where nobody catches it. */
const run = (connection: Connection, sql: string): Promise<void> =>
	new Promise((resolve, reject) => connection.run(sql, (error) => (error ? reject(error) : resolve())));

async function prepare(connection: Connection): Promise<void> {
	connection.configure('busyTimeout', 5000);
	await run(connection, 'PRAGMA synchronous = FULL');
	await run(connection, 'PRAGMA foreign_keys = ON');
}

/** Sequelize's SQLite dialect calls no afterConnect hook and opens a connection per transaction: set each up here. */
function prepareEveryConnection(sequelize: Sequelize): void {
	const manager = sequelize.connectionManager as unknown as {
		getConnection(options?: object): Promise<Connection>;
	};
	const original = manager.getConnection.bind(manager);
	manager.getConnection = async (options) => {
		const connection = await original(options);
		await (connection.prepared ??= prepare(connection));
		return connection;
	};
}

/** What goes into the transaction of the first write within some work, for example a note that the work was done. */
const beside = new AsyncLocalStorage<{ record: ((tx: Tx) => Promise<void>) | null }>();

/** Runs the work; `record` is written in the same transaction as its first write, so that both are there or neither. */
export function withFirstWrite<T>(record: (tx: Tx) => Promise<void>, work: () => Promise<T>): Promise<T> {
	return beside.run({ record }, work);
}

/** The work of one write, and beside it what waits for the first one. */
async function transact<T>(sequelize: Sequelize, work: (tx: Tx) => Promise<T>): Promise<T> {
	const waiting = beside.getStore();
	const record = waiting?.record;
	if (!waiting || !record) return sequelize.transaction(work);
	const result = await sequelize.transaction(async (tx) => {
		const done = await work(tx);
		await record(tx);
		return done;
	});
	waiting.record = null;
	return result;
}

/** One write at a time: SQLite has one writer, and waiting here leaves the thread pool to the readers. */
function writeQueue(sequelize: Sequelize): Database['write'] {
	const inside = new AsyncLocalStorage<true>();
	let tail: Promise<unknown> = Promise.resolve();
	return (work) => {
		if (inside.getStore()) throw new Error('write() must not be nested: pass the transaction on instead.');
		const run = () => inside.run(true, () => transact(sequelize, work));
		const result = tail.then(run, run);
		tail = result.catch(() => undefined);
		return result;
	};
}

/**
 * All or nothing, and one process at a time: a service that is stopped halfway through finds at its next start what was
 * there before. Works because every query outside `write()` goes over Sequelize's one common connection.
 */
async function migrate(sequelize: Sequelize): Promise<void> {
	await sequelize.query('BEGIN IMMEDIATE');
	try {
		await new Umzug({
			migrations,
			context: sequelize.getQueryInterface(),
			storage: new SequelizeStorage({ sequelize }),
			logger: undefined
		}).up();
		await sequelize.query('COMMIT');
	} catch (error) {
		await sequelize.query('ROLLBACK');
		throw error;
	}
}

export async function openDatabase(file: string): Promise<Database> {
	mkdirSync(dirname(file), { recursive: true });
	const sequelize = new Sequelize({
		dialect: 'sqlite',
		dialectModule: sqlite3,
		storage: file,
		logging: false,
		transactionType: Transaction.TYPES.IMMEDIATE
	});
	prepareEveryConnection(sequelize);
	await sequelize.query('PRAGMA journal_mode = WAL');
	initModels(sequelize);
	await migrate(sequelize);
	let closing: Promise<void> | undefined;
	return { sequelize, write: writeQueue(sequelize), close: () => (closing ??= sequelize.close()) };
}

// One database a process, kept over hot reloads in development.
const globals = globalThis as { ratewrightDatabase?: Promise<Database> };

/** Whether this evaluation of the module has bound its models: a hot reload brings new classes to an open database. */
let bound = false;

export function database(): Promise<Database> {
	const open = globals.ratewrightDatabase;
	if (open && !bound)
		globals.ratewrightDatabase = open.then((db) => {
			initModels(db.sequelize);
			return db;
		});
	bound = true;
	return (globals.ratewrightDatabase ??= openDatabase(settings().DATABASE_FILE));
}

/** For tests and commands: use this database from here on. */
export function useDatabase(db: Database): void {
	bound = true;
	globals.ratewrightDatabase = Promise.resolve(db);
}

export async function write<T>(work: (tx: Tx) => Promise<T>): Promise<T> {
	return (await database()).write(work);
}

export async function closeDatabase(): Promise<void> {
	const open = globals.ratewrightDatabase;
	globals.ratewrightDatabase = undefined;
	if (open) await (await open).close();
}
