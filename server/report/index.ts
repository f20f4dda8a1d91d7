export type { ReportContext, ReportedRun } from './context.ts';
export { curveTableCsv } from './curve-table-csv.ts';
export { curveTableJson } from './curve-table-json.ts';
export { curveTableGeoJson } from './curve-table-geojson.ts';
export { curveTableXlsx } from './curve-table-xlsx.ts';
export { profileCsv, type ProfileTable } from './profile-csv.ts';
export { reportHtml } from './report-html.ts';
export { reportPdf } from './report-pdf.ts';
