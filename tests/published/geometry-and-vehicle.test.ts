import { arcElements } from '../../shared/curving/circular-arc.ts';
import { clothoid } from '../../shared/curving/clothoid.ts';
import {
  arcDegreeFromRadius,
  chordDegreeFromRadius,
  radiusFromArcDegreeM,
  radiusFromChordDegreeM,
} from '../../shared/curving/degree-of-curve.ts';
import { naturalFrequencyHz } from '../../shared/curving/natural-frequency.ts';
import { criticalSpeedMps } from '../../shared/curving/resonance.ts';
import { versineM } from '../../shared/curving/versine.ts';
import { convert, degToRad, fromSi, radToDeg, toSi } from '../../shared/units.ts';
import type { PublishedRow } from './rows.ts';
import { testRows } from './rows.ts';

const FT = 0.3048;
const definition = { source: '18000/(π D) and 50/sin(D/2) ft', status: 'worked from a read formula' } as const;

const degrees: PublishedRow[] = [
  {
    name: 'radius of 1 degree, chord, ft',
    ours: radiusFromChordDegreeM(1) / FT,
    theirs: 5729.65,
    within: 0.005,
    source: 'theinfolist.com',
    status: 'read',
  },
  {
    name: 'radius of 1 degree, chord, m',
    ours: radiusFromChordDegreeM(1),
    theirs: 1746.4,
    within: 0.005,
    source: 'theinfolist.com',
    status: 'read',
  },
  {
    name: 'radius of 1 degree, arc, ft',
    ours: radiusFromArcDegreeM(1) / FT,
    theirs: 5729.58,
    within: 0.005,
    source: 'easycalculation.com',
    status: 'read',
  },
  ...(
    [
      [2, 2864.788976, 2864.934425],
      [5, 1145.91559, 1146.279281],
      [10, 572.957795, 573.685662],
      [20, 286.478898, 287.938524],
    ] as const
  ).flatMap(([D, arc, chord]) => [
    {
      name: `radius of ${String(D)} degrees, arc, ft`,
      ours: radiusFromArcDegreeM(D) / FT,
      theirs: arc,
      within: 6e-7,
      ...definition,
    },
    {
      name: `radius of ${String(D)} degrees, chord, ft`,
      ours: radiusFromChordDegreeM(D) / FT,
      theirs: chord,
      within: 6e-7,
      ...definition,
    },
  ]),
  ...(
    [
      [100, 17.463754, 17.532072],
      [200, 8.731877, 8.740349],
      [300, 5.821251, 5.823758],
      [500, 3.492751, 3.493292],
      [1000, 1.746375, 1.746443],
    ] as const
  ).flatMap(([R, arc, chord]) => [
    { name: `degree of ${String(R)} m, arc`, ours: arcDegreeFromRadius(R), theirs: arc, within: 6e-7, ...definition },
    {
      name: `degree of ${String(R)} m, chord`,
      ours: chordDegreeFromRadius(R),
      theirs: chord,
      within: 6e-7,
      ...definition,
    },
  ]),
];

const versines: PublishedRow[] = [
  ...(
    [
      [10, 100, 125.078223],
      [10, 300, 41.669561],
      [20, 250, 200.080064],
      [20, 500, 100.010002],
      [20, 1000, 50.00125],
    ] as const
  ).map(([chord, R, mm]) => ({
    name: `versine of ${String(chord)} m on R ${String(R)} m, mm`,
    ours: 1000 * versineM(chord, R),
    theirs: mm,
    within: 6e-7,
    source: 'geometry',
    status: 'mathematics' as const,
  })),
  {
    name: 'versine of a 62 ft string on 1 degree, in',
    ours: versineM(62 * FT, radiusFromChordDegreeM(1)) / 0.0254,
    theirs: 1,
    within: 0.01,
    source: 'TM 5-628, one inch a degree',
    status: 'read',
  },
];

// L, R: angle degrees, x, y, shift, centre.
const clothoids: PublishedRow[] = (
  [
    [64, 100, 18.334649, 63.34774, 6.776897, 1.700439, 31.891083],
    [100, 300, 9.549297, 99.722579, 5.544542, 1.387512, 49.953739],
    [50, 200, 7.161972, 49.921931, 2.081009, 0.520543, 24.986985],
    [80, 500, 4.583662, 79.948815, 2.132358, 0.533211, 39.991468],
    [120, 1000, 3.437747, 119.956807, 2.399383, 0.599923, 59.992801],
    [62.5, 250, 7.161972, 62.402414, 2.601262, 0.650678, 31.233731],
    [60, 150, 11.459156, 59.760444, 3.988586, 0.998573, 29.960044],
  ] as const
).flatMap(([L, R, angle, x, y, shift, centre]) => {
  const c = clothoid(L, R);
  const common = { within: 6e-7, source: 'Fresnel series', status: 'mathematics' } as const;
  const what = `of a clothoid of ${String(L)} m to R ${String(R)} m`;
  return [
    { name: `angle ${what}, degrees`, ours: radToDeg(c.angleRad), theirs: angle, ...common },
    { name: `x ${what}`, ours: c.xM, theirs: x, ...common },
    { name: `y ${what}`, ours: c.yM, theirs: y, ...common },
    { name: `shift ${what}`, ours: c.shiftM, theirs: shift, ...common },
    { name: `centre ${what}`, ours: c.centreXM, theirs: centre, ...common },
  ];
});

const printedClothoid: PublishedRow[] = [
  {
    name: 'N of the clothoid A 80, R 100',
    ours: clothoid(64, 100).xM,
    theirs: 63.348,
    within: 0.0005,
    source: 'surveying manuals STS-750 p. 210, KTS-470 p. 212',
    status: 'read',
  },
  {
    name: 'E of the clothoid A 80, R 100',
    ours: clothoid(64, 100).yM,
    theirs: 6.777,
    within: 0.0005,
    source: 'surveying manuals STS-750 p. 210, KTS-470 p. 212',
    status: 'read',
  },
  {
    name: 'A of the clothoid L 64, R 100',
    ours: clothoid(64, 100).parameterM,
    theirs: 80,
    within: 1e-9,
    source: 'surveying manuals STS-750 p. 210',
    status: 'read',
  },
];

const arcs: PublishedRow[] = (
  [
    [300, 30, 157.079633, 80.384758, 155.291427, 10.222252, 10.582854],
    [500, 45, 392.699082, 207.106781, 382.683432, 38.060234, 41.1961],
    [1000, 10, 174.532925, 87.488664, 174.311485, 3.805302, 3.819838],
  ] as const
).flatMap(([R, deg, arc, tangent, chord, versine, external]) => {
  const e = arcElements(R, degToRad(deg));
  const common = {
    within: 6e-7,
    source: 'easycalculation.com, curve formulas',
    status: 'worked from a read formula',
  } as const;
  const what = `of R ${String(R)} m through ${String(deg)} degrees`;
  return [
    { name: `arc ${what}`, ours: e.arcM, theirs: arc, ...common },
    { name: `tangent ${what}`, ours: e.tangentM, theirs: tangent, ...common },
    { name: `chord ${what}`, ours: e.chordM, theirs: chord, ...common },
    { name: `mid-ordinate ${what}`, ours: e.versineM, theirs: versine, ...common },
    { name: `external ${what}`, ours: e.externalM, theirs: external, ...common },
  ];
});

const vehicles: PublishedRow[] = [
  {
    name: 'frequency of 1.2 MN m/rad on 60 t m², Hz',
    ours: naturalFrequencyHz(1.2e6, 6e4),
    theirs: 0.711763,
    within: 5e-7,
    source: 'sqrt(K/I)/2π',
    status: 'mathematics',
  },
  {
    name: 'resonant speed of 0.6 Hz on 39 ft rails, mph',
    ours: fromSi(criticalSpeedMps(39 * FT, 0.6, 0), 'mph'),
    theirs: 15.954545,
    within: 5e-7,
    source: 'f = v / L; band 12 to 24 mph read at interfacejournal.com',
    status: 'worked from a read formula',
  },
  {
    name: 'resonant speed of 0.8 Hz on 25 m rails, km/h',
    ours: 3.6 * criticalSpeedMps(25, 0.8, 0),
    theirs: 72,
    within: 1e-9,
    source: 'f = v / L',
    status: 'mathematics',
  },
];

const units: PublishedRow[] = [
  {
    name: '1 knot, m/s',
    ours: toSi(1, 'kn'),
    theirs: 0.514444444,
    within: 5e-10,
    source: 'definition 1852 m/h',
    status: 'from memory',
  },
  {
    name: '22.4 knots, km/h',
    ours: convert(22.4, 'kn', 'km/h'),
    theirs: 41.4848,
    within: 1e-9,
    source: 'definition',
    status: 'from memory',
  },
  {
    name: '1 mph, m/s',
    ours: toSi(1, 'mph'),
    theirs: 0.44704,
    within: 1e-15,
    source: 'definition',
    status: 'from memory',
  },
  {
    name: '1 mph, km/h',
    ours: convert(1, 'mph', 'km/h'),
    theirs: 1.609344,
    within: 1e-12,
    source: 'definition',
    status: 'from memory',
  },
  {
    name: '0.1 g, m/s²',
    ours: toSi(0.1, 'g'),
    theirs: 0.980665,
    within: 1e-12,
    source: 'ASME JRC2011 abstract; standard g',
    status: 'read',
  },
];

testRows([...degrees, ...versines, ...clothoids, ...printedClothoid, ...arcs, ...vehicles, ...units]);
