import type { RequestHandler } from 'express';
import { BendbookError } from '../../shared/model/fault.ts';

const LOOPBACK_NAMES = /^(localhost|127(\.\d{1,3}){3}|\[::1\])(:\d+)?$/i;

/**
 * Keeps other web sites out. A page of another origin must not change anything here (its browser
 * says so in `Origin` and `Sec-Fetch-Site`), and a server on loopback answers only to names of this machine, so
 * that a name that somebody points at 127.0.0.1 does not make his page one of ours.
 */
export function sameOrigin(onLoopback: boolean): RequestHandler {
  return (request, _response, next) => {
    const host = request.headers.host ?? '';
    if (onLoopback && !LOOPBACK_NAMES.test(host)) throw foreign(`the name "${host}" is not of this machine`);
    if (request.method !== 'GET' && request.method !== 'HEAD' && request.method !== 'OPTIONS') {
      const { origin } = request.headers;
      const site = request.headers['sec-fetch-site'];
      const alien = site === 'cross-site' || site === 'same-site';
      if (alien || (origin !== undefined && hostOf(origin) !== host)) {
        throw foreign('the request comes from a page of another origin');
      }
    }
    next();
  };
}

function hostOf(origin: string): string | null {
  return URL.canParse(origin) ? new URL(origin).host : null;
}

function foreign(cause: string): BendbookError {
  return new BendbookError('http/foreign', {
    cause,
    remedy: 'Open the address that the server printed at its start',
  });
}
