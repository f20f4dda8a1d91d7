/**
 * Noise of one log as estimated from the log itself.
 * Position error per axis: white (sigmaWhiteM) plus Gauss-Markov (variance sigmaWanderM^2, correlation time wanderTimeS).
 * Doppler error per axis: white (sigmaDopplerWhiteMps) plus Gauss-Markov (sigmaDopplerSlowMps, dopplerTimeS).
 */
export interface NoiseModel {
  readonly sigmaWhiteM: number;
  readonly sigmaWanderM: number;
  readonly wanderTimeS: number;
  /** Cross-track Doppler error, from the course channel. */
  readonly sigmaDopplerWhiteMps: number;
  readonly sigmaDopplerSlowMps: number;
  readonly dopplerTimeS: number;
  /** Error of the speed channel, m/s (0 when there is none). */
  readonly sigmaSpeedMps: number;
  /** Course and speed lag the position stamp by this, s. */
  readonly lagS: number;
  readonly lagSdS: number;
}

/** Log quality in numbers that the user sees. */
export interface LogQuality {
  readonly noise: NoiseModel;
  readonly fixCount: number;
  readonly rateHz: number;
  /** Effective number of independent fixes. */
  readonly effectiveFixes: number;
  /** Share of moving fixes with a usable course, 0..1. */
  readonly courseShare: number;
  readonly speedShare: number;
  /** Smallest |curvature| told from straight over 100 m at the run's median moving speed (95 %), 1/m. */
  readonly smallestCurvaturePerM: number;
}

/**
 * Smoothed motion at each fix of a Run. Columns have the run's fix count.
 * sd columns are one standard deviation, calibrated.
 */
export interface Motion {
  readonly count: number;
  readonly timeS: Float64Array;
  /** Distance along the line from the first fix, from the smoothed speed; never decreases. */
  readonly chainageM: Float64Array;
  readonly xM: Float64Array;
  readonly yM: Float64Array;
  /** Heading, radians counter-clockwise from +x of the run's plane, unwrapped. */
  readonly headingRad: Float64Array;
  readonly speedMps: Float64Array;
  /** dv/dt, m/s^2. */
  readonly accelerationMps2: Float64Array;
  /** 1/m, positive turning left. */
  readonly curvaturePerM: Float64Array;
  readonly positionSdM: Float32Array;
  readonly headingSdRad: Float32Array;
  readonly speedSdMps: Float32Array;
  readonly curvatureSdPerM: Float32Array;
  /** Correlation coefficient of the errors of speed and curvature. */
  readonly speedCurvatureCorrelation: Float32Array;
  /** Variance factor (>= 1) given to the fix's position and to its Doppler velocity by the robust weights. */
  readonly positionVarianceFactor: Float32Array;
  readonly dopplerVarianceFactor: Float32Array;
  readonly quality: LogQuality;
}

/** Motion resampled at equal steps of chainage; what profiles, bands and exports show. NaN = unknown. */
export interface Profile {
  readonly count: number;
  readonly spacingM: number;
  readonly chainageM: Float64Array;
  /** Seconds since Run.startUtcS of first passing this chainage. */
  readonly timeS: Float64Array;
  readonly latDeg: Float64Array;
  readonly lonDeg: Float64Array;
  readonly elevationM: Float32Array;
  readonly speedMps: Float32Array;
  readonly speedSdMps: Float32Array;
  /** Clockwise from true north, [0, 2 pi). */
  readonly courseRad: Float32Array;
  readonly accelerationMps2: Float32Array;
  /** Smoother's estimate, positive left. */
  readonly curvaturePerM: Float32Array;
  readonly curvatureSdPerM: Float32Array;
  readonly speedCurvatureCorrelation: Float32Array;
  /** Curvature of the fitted alignment, positive left. */
  readonly fittedCurvaturePerM: Float32Array;
  /** Position sd, m. */
  readonly positionSdM: Float32Array;
  /** 1 where good fixes observe this place, 0 inside gaps and bursts. */
  readonly observed: Uint8Array;
}
