import type { Recording, RecordingFormat } from '../../shared/model/recording.ts';
import type { ByteSource } from './byte-source.ts';
import { looksDelimited } from './delimited/dialect.ts';
import { readDelimited } from './delimited/read.ts';
import { isFit } from './fit-container.ts';
import { readFit } from './fit.ts';
import { readGeoJson } from './geojson.ts';
import { readGpx } from './gpx.ts';
import { readIgc } from './igc.ts';
import { readKml } from './kml.ts';
import { readNmea } from './nmea.ts';
import type { ReadContext } from './options.ts';
import { readTcx } from './tcx.ts';

/** What a recogniser is shown of a file: its first bytes, as they are and as text (NULs removed). */
export interface Head {
  readonly bytes: Uint8Array;
  readonly text: string;
}

export interface Format {
  readonly name: RecordingFormat;
  /** True when the content, whatever its file is called, is of this format. */
  readonly recognises: (head: Head) => boolean;
  readonly read: (source: ByteSource, context: ReadContext) => Promise<Recording>;
}

/** True when the first element of an XML document, prefix aside, is `name`. */
const rootIs = (name: string) => {
  const root = new RegExp(`<(?:[\\w.-]+:)?${name}[\\s/>]`, 'i');
  const any = /<(?![?!])[^>]{0,200}/;
  return ({ text }: Head): boolean => {
    const bare = text.replace(/<!--[\s\S]*?-->/g, '');
    const first = any.exec(bare);
    return first !== null && bare.trimStart().startsWith('<') && root.test(`${first[0]}>`);
  };
};

/** Formats in the order in which they are asked; the first that recognises the content reads it. */
export const FORMATS: readonly Format[] = [
  { name: 'fit', recognises: ({ bytes }) => isFit(bytes), read: readFit },
  { name: 'gpx', recognises: rootIs('gpx'), read: readGpx },
  { name: 'tcx', recognises: rootIs('TrainingCenterDatabase'), read: readTcx },
  { name: 'kml', recognises: rootIs('kml'), read: readKml },
  {
    name: 'geojson',
    recognises: ({ text }) =>
      /^\s*\{/.test(text) &&
      /"type"\s*:\s*"(?:Feature|FeatureCollection|GeometryCollection|(?:Multi)?(?:Point|LineString|Polygon))"/.test(
        text,
      ),
    read: readGeoJson,
  },
  {
    name: 'igc',
    recognises: ({ text }) => /^\s*A\w{3}/.test(text) && /^B\d{13}[NS]\d{8}[EW][AV]/m.test(text.replaceAll('\r', '\n')),
    read: readIgc,
  },
  {
    name: 'nmea',
    // A sentence of interest, or any sentence with its checksum.
    recognises: ({ text }) =>
      /\$[A-Z]{2}(?:RMC|GGA|GNS|GLL|VTG|GSA|GSV|GST|ZDA),|^\$[A-Z]{5},.*\*[0-9A-F]{2}\s*$/m.test(text),
    read: readNmea,
  },
  {
    name: 'csv',
    recognises: ({ text }) => !/^\s*[<{[]/.test(text) && looksDelimited(text),
    read: readDelimited,
  },
];
