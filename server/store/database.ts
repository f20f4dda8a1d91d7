import { rename } from 'node:fs/promises';
import { existsSync } from 'node:fs';
import { Kysely, SqliteDialect, type SqliteDatabase } from 'kysely';
import { BendbookError } from '../../shared/model/fault.ts';
import { migrate } from './migrations.ts';
import { closeSqlite, openSqlite, type SqliteConnection } from './sqlite.ts';
import type { Tables } from './tables.ts';

export interface Database {
  readonly db: Kysely<Tables>;
  close(): Promise<void>;
}

/**
 * Opens the database file, checks that it is whole and brings its tables up to date.
 *
 * @throws BendbookError `store/damaged` when the file is not a whole database (the recordings lie beside
 * it untouched), `store/in-use` when another server has it open, `store/newer` after a downgrade.
 */
export async function openDatabase(path: string): Promise<Database> {
  const connection = await openWhole(path);
  try {
    migrate(connection, path);
  } catch (error) {
    closeSqlite(connection);
    throw error;
  }
  const db = new Kysely<Tables>({ dialect: new SqliteDialect({ database: asKyselyDatabase(connection) }) });
  return {
    db,
    async close() {
      await db.destroy();
      closeSqlite(connection);
    },
  };
}

/** Moves a damaged database and what belongs to it aside; returns where it is now. */
export async function setAside(path: string): Promise<string> {
  let n = 1;
  while (existsSync(`${path}.damaged-${String(n)}`)) n++;
  const aside = `${path}.damaged-${String(n)}`;
  for (const suffix of ['', '-wal', '-shm']) {
    if (existsSync(path + suffix)) await rename(path + suffix, aside + suffix);
  }
  return aside;
}

async function openWhole(path: string): Promise<SqliteConnection> {
  let connection: SqliteConnection | null = null;
  try {
    connection = await openSqlite(path);
    const [check] = connection.prepare('PRAGMA quick_check(1)').all() as { quick_check: string }[];
    if (check?.quick_check !== 'ok') throw new Error(check?.quick_check ?? 'no answer');
    return connection;
  } catch (error) {
    connection?.close();
    throw openFault(path, error);
  }
}

function openFault(path: string, error: unknown): BendbookError {
  const message = error instanceof Error ? error.message : String(error);
  if (/database is locked/i.test(message)) {
    return new BendbookError(
      'store/in-use',
      {
        cause: 'another Bendbook is using this data folder',
        place: { file: path },
        remedy: 'Use the one that runs, stop it, or choose another folder with --data DIR',
      },
      { cause: error },
    );
  }
  if (/unable to open|readonly|permission|disk is full|disk I\/O/i.test(message)) {
    return new BendbookError(
      'store/not-opened',
      {
        cause: `the database cannot be opened: ${message}`,
        place: { file: path },
        remedy:
          'Check that the data folder can be written and that its disk has room, or choose another with --data DIR',
      },
      { cause: error },
    );
  }
  return new BendbookError(
    'store/damaged',
    {
      cause: `the database is damaged: ${message}`,
      place: { file: path },
      remedy:
        'The uploaded recordings are safe in the folder "recordings" beside it. Start once with --recover: the damaged file is set aside, the recordings are listed and analysed anew; limit sets, vehicles, registers and settings of your own have to be entered again',
    },
    { cause: error },
  );
}

/** node:sqlite under the interface that Kysely's dialect expects. */
function asKyselyDatabase(connection: SqliteConnection): SqliteDatabase {
  return {
    // Closed by `Database.close`, which gives the lock back first.
    close: () => undefined,
    prepare(sql) {
      const statement = connection.prepare(sql);
      const reader = /^\s*(select|with|pragma)\b/i.test(sql) || /\breturning\b/i.test(sql);
      return {
        reader,
        all: (parameters) => statement.all(...parameters),
        run: (parameters) => statement.run(...parameters),
        iterate: (parameters) => statement.iterate(...parameters),
      };
    },
  };
}
