import type { Kysely } from 'kysely';
import type { DocumentKind, Tables } from './tables.ts';

/** Limit sets, vehicles and registers of the user's own, and settings by key: JSON bodies that the store does not look into. */
export class DocumentTable {
  readonly #db: Kysely<Tables>;

  constructor(db: Kysely<Tables>) {
    this.#db = db;
  }

  async list(kind: DocumentKind): Promise<unknown[]> {
    const rows = await this.#db.selectFrom('documents').selectAll().where('kind', '=', kind).orderBy('id').execute();
    return rows.map(({ body_json }) => JSON.parse(body_json) as unknown);
  }

  async put(kind: DocumentKind, id: string, body: unknown): Promise<void> {
    const body_json = JSON.stringify(body);
    await this.#db
      .insertInto('documents')
      .values({ kind, id, body_json })
      .onConflict((conflict) => conflict.columns(['kind', 'id']).doUpdateSet({ body_json }))
      .execute();
  }

  async remove(kind: DocumentKind, id: string): Promise<boolean> {
    const { numDeletedRows } = await this.#db
      .deleteFrom('documents')
      .where('kind', '=', kind)
      .where('id', '=', id)
      .executeTakeFirst();
    return numDeletedRows > 0n;
  }

  async setting(key: string): Promise<unknown> {
    const row = await this.#db.selectFrom('settings').selectAll().where('key', '=', key).executeTakeFirst();
    return row === undefined ? null : (JSON.parse(row.value_json) as unknown);
  }

  async putSetting(key: string, value: unknown): Promise<void> {
    const value_json = JSON.stringify(value);
    await this.#db
      .insertInto('settings')
      .values({ key, value_json })
      .onConflict((conflict) => conflict.column('key').doUpdateSet({ value_json }))
      .execute();
  }
}
