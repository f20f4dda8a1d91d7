import { Kysely, SqliteDialect, type SqliteDatabase } from 'kysely';
import { BendbookError } from '../../shared/model/fault.ts';
import { migrate } from './migrations.ts';
import { openSqlite, type SqliteConnection } from './sqlite.ts';
import type { Tables } from './tables.ts';

export interface Database {
  readonly db: Kysely<Tables>;
  close(): Promise<void>;
}

/**
 * Opens the database file, checks that it is whole and brings its tables up to date.
 *
 * @throws BendbookError `store/damaged` when the file is not a whole database; recordings lie beside it
 * untouched and are taken up again when it is moved away.
 */
export async function openDatabase(path: string): Promise<Database> {
  let connection: SqliteConnection;
  try {
    connection = await openSqlite(path);
    const [check] = connection.prepare('PRAGMA quick_check(1)').all() as { quick_check: string }[];
    if (check?.quick_check !== 'ok') throw new Error(check?.quick_check ?? 'no answer');
  } catch (error) {
    throw new BendbookError(
      'store/damaged',
      {
        cause: `the database is damaged: ${error instanceof Error ? error.message : String(error)}`,
        place: { file: path },
        remedy:
          'The uploaded recordings are safe in the folder "recordings" beside it. Move the database file away and start again: they are listed and analysed anew; notes and settings kept in the file are lost',
      },
      { cause: error },
    );
  }
  const db = new Kysely<Tables>({ dialect: new SqliteDialect({ database: asKyselyDatabase(connection) }) });
  migrate(connection);
  return {
    db,
    async close() {
      await db.destroy();
    },
  };
}

/** node:sqlite under the interface that Kysely's dialect expects. */
function asKyselyDatabase(connection: SqliteConnection): SqliteDatabase {
  return {
    close: () => connection.close(),
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
