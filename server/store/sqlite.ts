/** The part of node:sqlite that the store uses; the package and the built-in share it. */
interface SqliteStatement {
  all(...parameters: unknown[]): unknown[];
  run(...parameters: unknown[]): { changes: number | bigint; lastInsertRowid: number | bigint };
  iterate(...parameters: unknown[]): IterableIterator<unknown>;
}
export interface SqliteConnection {
  exec(sql: string): void;
  prepare(sql: string): SqliteStatement;
  close(): void;
}

/**
 * Opens a database with the interface of node:sqlite: the built-in one where Node has it (22.13 and
 * later), else the package that carries the same interface with its binary, so that no compiler is needed.
 */
export async function openSqlite(path: string): Promise<SqliteConnection> {
  const module = await sqliteModule();
  const connection = new module.DatabaseSync(path);
  try {
    // FULL: an acknowledged recording survives a killed process and a power cut alike.
    // EXCLUSIVE: a second server on one data folder would sweep the uploads and repeat the jobs of the
    // first; the lock of the operating system ends with the process, however it ends.
    connection.exec(
      'PRAGMA busy_timeout = 1000; PRAGMA locking_mode = EXCLUSIVE; PRAGMA journal_mode = WAL; PRAGMA synchronous = FULL; PRAGMA foreign_keys = ON',
    );
  } catch (error) {
    connection.close();
    throw error;
  }
  return connection;
}

/**
 * Brings what the log holds home, gives the lock back and closes. Closing alone would keep file and lock
 * until the last prepared statement is collected.
 */
export function closeSqlite(connection: SqliteConnection): void {
  try {
    connection.exec('PRAGMA journal_mode = DELETE; PRAGMA locking_mode = NORMAL; SELECT count(*) FROM sqlite_master');
  } finally {
    connection.close();
  }
}

async function sqliteModule(): Promise<{ DatabaseSync: new (path: string) => SqliteConnection }> {
  const [major = 0, minor = 0] = process.versions.node.split('.').map(Number);
  if (major > 22 || (major === 22 && minor >= 13)) {
    // The name is held apart: compilers and bundlers for Node 20 do not know the built-in.
    const builtIn = 'node:sqlite';
    return (await import(builtIn)) as { DatabaseSync: new (path: string) => SqliteConnection };
  }
  return await import('@photostructure/sqlite');
}
