import { deflateRawSync } from 'node:zlib';
import { describe, expect, it } from 'vitest';
import { syntheticSeeds } from '../bench/mutation-seeds.ts';
import { ingest } from '../unit/ingest/support.ts';

interface Entry {
  readonly name: string;
  readonly content: Uint8Array;
  /** Size written into the directory instead of the true one. */
  readonly lie?: number;
  readonly encrypted?: boolean;
}

const CRC = Array.from({ length: 256 }, (_, n) => {
  let c = n;
  for (let k = 0; k < 8; k++) c = (c & 1) !== 0 ? 0xedb88320 ^ (c >>> 1) : c >>> 1;
  return c >>> 0;
});

function crc32(bytes: Uint8Array): number {
  let c = 0xffffffff;
  for (const byte of bytes) c = CRC[(c ^ byte) & 255]! ^ (c >>> 8);
  return (c ^ 0xffffffff) >>> 0;
}

/** A zip file, so that tests can write what no tool will. Source: PKWARE APPNOTE.TXT 6.3, sections 4.3.7, 4.3.12, 4.3.16. */
function zip(entries: readonly Entry[]): Buffer {
  const parts: Buffer[] = [];
  const directory: Buffer[] = [];
  let offset = 0;
  for (const { name, content, lie, encrypted } of entries) {
    const packed = deflateRawSync(content);
    const title = Buffer.from(name);
    const common = Buffer.alloc(26);
    common.writeUInt16LE(20, 0);
    common.writeUInt16LE(0x800 | (encrypted === true ? 1 : 0), 2);
    common.writeUInt16LE(8, 4);
    common.writeUInt32LE(crc32(content), 10);
    common.writeUInt32LE(packed.length, 14);
    common.writeUInt32LE(lie ?? content.length, 18);
    common.writeUInt16LE(title.length, 22);
    const local = Buffer.concat([Buffer.from('PK\x03\x04'), common, title, packed]);
    const central = Buffer.alloc(46);
    central.write('PK\x01\x02', 'latin1');
    central.writeUInt16LE(20, 4);
    common.copy(central, 6, 0, 26);
    central.writeUInt32LE(offset, 42);
    directory.push(Buffer.concat([central, title]));
    parts.push(local);
    offset += local.length;
  }
  const list = Buffer.concat(directory);
  const end = Buffer.alloc(22);
  end.write('PK\x05\x06', 'latin1');
  end.writeUInt16LE(entries.length, 8);
  end.writeUInt16LE(entries.length, 10);
  end.writeUInt32LE(list.length, 12);
  end.writeUInt32LE(offset, 16);
  return Buffer.concat([...parts, list, end]);
}

const seeds = syntheticSeeds();
const csv = seeds.find(({ name }) => name === 'csv')!.bytes;
const outcome = async (content: Uint8Array) => {
  const { recordings, refused } = await ingest(content);
  return { read: recordings.map(({ name }) => name), refused: refused.map(({ name, fault }) => [name, fault.code]) };
};

describe('archives', () => {
  it('give one outcome for each of their files, logs of ten kinds mixed with others', async () => {
    const members = seeds
      .filter(({ name }) => name !== 'gzip')
      .map(({ name, bytes }) => ({ name: `day/${name}`, content: bytes }));
    const other = [
      { name: 'day/', content: new Uint8Array(0) },
      { name: '__MACOSX/._x', content: Buffer.from('x') },
      { name: 'read me.txt', content: Buffer.from('Recorded on Monday.') },
      { name: 'empty.gpx', content: new Uint8Array(0) },
    ];
    const { read, refused } = await outcome(zip([...members, ...other]));
    expect(read).toEqual(members.map(({ name }) => `log/${name}`));
    expect(refused).toEqual([
      ['log/read me.txt', 'ingest/not-a-log'],
      ['log/empty.gpx', 'ingest/empty'],
    ]);
  });

  it('refuse names that lead out of them, and read the rest', async () => {
    const names = ['../../etc/x.csv', '/abs.csv', 'C:/x.csv', 'a\\b.csv'];
    const { read, refused } = await outcome(zip([...names, 'good.csv'].map((name) => ({ name, content: csv }))));
    expect(read).toEqual(['log/good.csv']);
    expect(refused).toEqual(names.map((name) => [`log/${name}`, 'ingest/unsafe-name']));
  });

  it('refuse bombs that are honest about their size, and those that lie', async () => {
    const zeros = Buffer.alloc(70 << 20);
    expect((await outcome(zip([{ name: 'x.csv', content: zeros }]))).refused).toEqual([
      ['log/x.csv', 'ingest/archive-too-large'],
    ]);
    const lying = await outcome(zip([{ name: 'x.csv', content: Buffer.concat([csv, csv]), lie: csv.length }]));
    expect(lying).toEqual({ read: [], refused: [['log/x.csv', 'ingest/damaged-archive']] });
  });

  it('say which member is encrypted', async () => {
    const { refused } = await outcome(zip([{ name: 'x.csv', content: csv, encrypted: true }]));
    expect(refused).toEqual([['log/x.csv', 'ingest/encrypted']]);
  });

  it('look at a thousand files and no more', async () => {
    const many = Array.from({ length: 1010 }, (_, i) => ({ name: `${String(i)}.txt`, content: Buffer.from('x') }));
    const { refused } = await outcome(zip(many));
    expect(refused).toHaveLength(1001);
    expect(refused.at(-1)).toEqual(['log', 'ingest/too-many-members']);
  });

  it('open archives inside them, but not without end', async () => {
    const inner = zip([{ name: 'x.csv', content: csv }]);
    expect((await outcome(zip([{ name: 'in.zip', content: inner }]))).read).toEqual(['log/in.zip/x.csv']);
    const third = zip([{ name: 'mid.zip', content: zip([{ name: 'in.zip', content: inner }]) }]);
    expect((await outcome(third)).refused).toEqual([['log/mid.zip/in.zip', 'ingest/nested-archive']]);
  });

  it('are refused whole when their directory is missing or they hold nothing', async () => {
    const whole = zip([{ name: 'x.csv', content: csv }]);
    expect((await outcome(whole.subarray(0, whole.length - 30))).refused).toEqual([['log', 'ingest/damaged-archive']]);
    expect((await outcome(zip([]))).refused).toEqual([['log', 'ingest/empty']]);
  });
});
