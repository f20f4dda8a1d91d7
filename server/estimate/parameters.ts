/** Parameters of the motion model and of the receiver's errors, as the filter uses them. */
export interface Parameters {
  /** Strength of the curvature walk in distance, 1/m^3: variance of curvature gained per metre over long distances. */
  readonly curvatureWalk: number;
  /**
   * The walk weakens with speed as (typicalSpeedMps / v)^walkExponent and the length below grows with v where this is not 0:
   * curves are laid out (and driven) for a lateral acceleration, so that curvature falls with the square of the speed.
   */
  readonly walkExponent: 0 | 2 | 4;
  readonly typicalSpeedMps: number;
  /** Length over which the change of curvature keeps its sign and size (about that of a transition), m. */
  readonly changeLengthM: number;
  /** Strength of the acceleration's random change, (m/s^2)^2 per second. */
  readonly jerkNoise: number;
  /** White position error per axis, m. */
  readonly whiteM: number;
  /** Diffusion of the wandering position error per axis, m^2/s. */
  readonly diffusion: number;
  /** Error of the time stamps, s; acts along the track. */
  readonly stampSdS: number;
  /** Sd of the speed observation, enlarged for its correlation at the log's rate, m/s. */
  readonly speedMps: number;
  readonly courseWhiteMps: number;
  readonly courseSlowMps: number;
  /** Correlation time of the slow Doppler error, s. */
  readonly dopplerTimeS: number;
}

/** Relaxation time of the acceleration, s: braking and traction hold for several seconds. */
export const ACCELERATION_TIME_S = 8;
/** Correlation time assumed for the wandering position error; a log identifies only its diffusion, s. */
export const WANDER_TIME_S = 120;

/**
 * Strength of the curvature walk and length of its changes at speed v; kept within four times slower and faster than typical.
 */
export function walkAt(parameters: Parameters, speedMps: number, out: { walk: number; lengthM: number }): void {
  const { walkExponent, typicalSpeedMps } = parameters;
  let walk = parameters.curvatureWalk;
  let length = parameters.changeLengthM;
  if (walkExponent !== 0) {
    const ratio = Math.min(4, Math.max(0.25, speedMps / typicalSpeedMps));
    length *= ratio;
    walk /= walkExponent === 2 ? ratio * ratio : ratio * ratio * ratio * ratio;
  }
  out.walk = walk;
  out.lengthM = length;
}
