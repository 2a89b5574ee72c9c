// SPDX-License-Identifier: MIT
// The messages of /wall/stream, as types. Times are the log's own seconds; SI units throughout; a number that is
// not known is null, and one with an uncertainty is [value, standard uncertainty].

/** @typedef {[number, number]} Quantity value and one standard uncertainty */

/**
 * @typedef {object} Hello
 * @property {"hello"} kind
 * @property {string} version
 * @property {string} car
 * @property {string} origin log file or endpoint
 * @property {boolean} live
 * @property {boolean} smoothed the report's areas come from the whole outing, the page's from what was known at the time
 * @property {Quantity|null} mass of the car file, kg
 * @property {Quantity|null} fuel_per_lap kg
 * @property {number} stream counts restarts of the on-car node
 * @property {"air"|"ground"} reference speed that the areas refer to
 * @property {{short_share: number, alarm_probability: number, slow_factor: number}} limits
 * @property {string[]} cautions
 * @property {{name: string, unit: string}[]} channels
 */

/** @typedef {Record<string, (number|null)[]>} Columns arrays of one length, by name; see series.js */

/**
 * @typedef {object} Closure
 * @property {number} number
 * @property {number} lap
 * @property {number} zone 0 where no braking followed
 * @property {number} time_command
 * @property {number} time_closed
 * @property {number} speed at the command
 * @property {number} closing_time
 * @property {Quantity|null} tau
 * @property {number|null} t95 null where the data could not tell or the flow stays away in part
 * @property {number|null} t95_low
 * @property {number|null} t95_high
 * @property {number|null} plateau
 * @property {number|null} chords
 * @property {boolean} whole
 * @property {number|null} time_brake
 * @property {Quantity|null} margin
 * @property {Quantity|null} shortfall
 * @property {number|null} shortfall_share
 * @property {number|null} probability_short
 * @property {number|null} probability_slow
 * @property {boolean} slow
 * @property {"full"|"short"|"unclear"|null} verdict
 * @property {boolean} usual_known
 */

/**
 * @typedef {object} Regrowth
 * @property {number} closure number of the closing
 * @property {number} zone
 * @property {boolean} final
 * @property {boolean} shut zero is the flap being shut; else the closing command
 * @property {number} time_shut source time of zero
 * @property {number} time_command
 * @property {number} chord_time seconds for one chord
 * @property {number} known_until relative to zero; beyond is expectation
 * @property {number[]} t relative to zero
 * @property {number[]} share median
 * @property {number[]} low 95 % interval
 * @property {number[]} high
 * @property {{t: number[], position: number[]}} flap
 */

/**
 * @typedef {object} Alarm
 * @property {number} id
 * @property {"short_at_brakes"|"unknown_at_brakes"|"slow_reattachment"|"data_stale"|"sensor_distrusted"} condition
 * @property {number} t
 * @property {"high"|"medium"|"low"} severity
 * @property {string} text
 * @property {number|null} closure
 * @property {string|null} channel
 * @property {boolean} active
 * @property {boolean} acknowledged
 * @property {number} burst id of the first alarm of its burst
 * @property {number} times how often the condition came back while the alarm stood
 */

/**
 * @typedef {object} ChannelHealth
 * @property {string} name
 * @property {"good"|"distrusted"|"absent"} trust
 * @property {"none"|"gone"|"stuck"|"jumped"|"drifting"|"noisy"|"disagrees"} fault
 * @property {number|null} since
 * @property {number|null} rate_hz
 * @property {number} samples
 * @property {number} gaps
 * @property {number} repeats
 * @property {number} not_finite
 * @property {number} out_of_range
 * @property {number} gated
 * @property {number|null} value
 * @property {number|null} innovation
 * @property {number|null} innovation_sd
 * @property {number|null} test_ratio over 1 is refused by the gate
 * @property {number|null} age_s
 */

/**
 * @typedef {object} Now
 * @property {number} t
 * @property {Columns} samples
 * @property {string[]} flags
 * @property {number|null} lap
 * @property {number|null} lap_distance
 * @property {number} age_s
 * @property {LinkState} link
 */

/**
 * @typedef {object} LinkState between the car's node and the program
 * @property {"up"|"silent"|"ended"} state
 * @property {number} [messages]
 * @property {number} [lost]
 * @property {number} [repeated]
 * @property {number} [out_of_order]
 * @property {number} [damaged]
 * @property {number} [restarts]
 */

/**
 * @typedef {object} Conditions ranges [least, most] over the outing; headwind: mean and standard deviation
 * @property {[number, number]|null} air_temperature K
 * @property {[number, number]|null} air_pressure Pa
 * @property {[number, number]|null} relative_humidity
 * @property {[number, number]|null} air_density
 * @property {[number, number]|null} headwind m/s
 * @property {[number, number]|null} lap
 */

/** @typedef {{complete: boolean, summary: Record<string, any>, conditions: Conditions|null}} End */

/** @typedef {{kind: string} & Record<string, any>} Message */

export {};
