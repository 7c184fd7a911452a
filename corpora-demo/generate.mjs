// Writes the demo data: what a refrigerated container, its controller and its ship send home from an ocean
// crossing. Everything is invented. See README.md beside this file.
//
//   node corpora-demo/generate.mjs            writes the four data files and sha256.txt beside itself
//   import { generateDemo } from './generate.mjs'
//
// The bytes must come out the same on every machine. So: one seed, fixed below; no clock, no Math.random, and of
// floating point only what IEEE 754 rounds exactly (+ - * / and floor). Sines are Bhaskara's fraction, waves are
// triangles, drifts are walks in integers.

import { createHash } from 'node:crypto';
import { writeFileSync } from 'node:fs';
import { dirname, join } from 'node:path';
import { argv } from 'node:process';
import { fileURLToPath, pathToFileURL } from 'node:url';
import seedrandom from 'seedrandom';

const SEED = 'reefer trackers, first crossing';
const START = 1772409600; // 2026-03-02T00:00:00Z

const DAY = 1440; // in minutes, the step of the simulation
const DEGREE = 1_000_000; // temperatures are kept in integer millionths of a degree Celsius

// ---------------------------------------------------------------------------------------------------------------
// Chance. Each file draws from a stream of its own, so that a change to one leaves the others alone.

class Dice {
  constructor(name) {
    this.draw = seedrandom(`${SEED}: ${name}`);
  }
  /** An integer from low to high, both included. */
  from(low, high) {
    return low + Math.floor(this.draw() * (high - low + 1));
  }
  /** True once in n on average. */
  once(n) {
    return this.from(1, n) === 1;
  }
  /** Bell-shaped around 0, never beyond ±width; the standard deviation is about 0.29 width. */
  bell(width) {
    const sum =
      this.from(-width, width) +
      this.from(-width, width) +
      this.from(-width, width) +
      this.from(-width, width);
    return toInteger(sum / 4);
  }
  pick(list) {
    return list[this.from(0, list.length - 1)];
  }
}

/** Half goes up, whatever the sign; -0 becomes 0. */
function toInteger(x) {
  return Math.floor(x + 0.5) + 0;
}

function clamp(x, low, high) {
  return Math.max(low, Math.min(x, high));
}

/** One step of x towards target; it would cover all but 1/e of the way in `steps` steps. */
function towards(x, target, steps) {
  return x + toInteger((target - x) / steps);
}

/** -height..height, once up and down in `period`. */
function triangle(time, period, height) {
  const phase = ((time % period) + period) % period;
  const half = period / 2;
  return toInteger((height * (phase < half ? 2 * phase - half : 3 * half - 2 * phase)) / half);
}

/** 10 000 × the sine of an angle in hundredths of a degree, as an integer (Bhaskara's approximation). */
function sine(angle) {
  const turn = ((angle % 36000) + 36000) % 36000;
  const x = turn % 18000;
  const product = x * (18000 - x);
  const value = Math.floor((40000 * product) / (405_000_000 - product));
  return turn < 18000 ? value : -value;
}

function cosine(angle) {
  return sine(angle + 9000);
}

/** An integer number of tenths (or hundredths …) as decimal text. */
function decimal(value, places) {
  const digits = String(Math.abs(value)).padStart(places + 1, '0');
  const cut = digits.length - places;
  return `${value < 0 ? '-' : ''}${digits.slice(0, cut)}.${digits.slice(cut)}`;
}

function tenths(microdegrees) {
  return decimal(toInteger((microdegrees * 10) / DEGREE), 1);
}

// ---------------------------------------------------------------------------------------------------------------
// The cooling unit, minute by minute. Frozen cargo: the compressor goes on and off around the set point. Chilled
// cargo: it runs all the time and the supply air swings slowly around the set point.

class CoolingUnit {
  /** tell(what, details) is called for each event. */
  constructor(dice, setPoint, tell = () => {}) {
    this.dice = dice;
    this.tell = tell;
    this.minute = 0;
    this.ambientBase = dice.from(17, 23) * DEGREE;
    this.ambient = this.ambientBase;
    this.setPoint = setPoint * (DEGREE / 100); // given in hundredths of a degree
    this.supply = this.setPoint + dice.from(1, 4) * DEGREE;
    this.returned = this.supply + dice.from(1, 2) * DEGREE;
    this.cargo = [];
    this.load();
    this.coil = this.supply;
    this.humidity = 7500; // hundredths of a percent
    this.compressor = true;
    this.compressorSince = 0;
    this.heater = false;
    this.defrostLeft = 0;
    this.defrostSince = 0;
    this.nextDefrost = dice.from(120, 500);
    this.doorLeft = 0;
    this.doorSince = 0;
    this.mainsLeft = 0;
    this.mainsSince = 0;
    this.battery = 4080; // millivolts
    this.swing = dice.from(41, 59); // minutes
    this.outOfRange = 0;
  }

  get frozen() {
    return this.setPoint < -5 * DEGREE;
  }
  get door() {
    return this.doorLeft > 0;
  }
  get defrost() {
    return this.defrostLeft > 0;
  }
  get mains() {
    return this.mainsLeft === 0;
  }

  changeSetPoint(hundredths) {
    const before = this.setPoint;
    this.setPoint = hundredths * (DEGREE / 100);
    if (this.setPoint !== before) this.tell('set', { before });
  }
  /** Cargo comes aboard, cooled beforehand to a little above the set point. */
  load() {
    this.cargo = [1, 2, 3].map(() => this.setPoint + this.dice.from(2, 18) * (DEGREE / 10));
  }
  openDoor(minutes) {
    if (this.door) return;
    this.doorLeft = minutes;
    this.doorSince = this.minute;
    this.tell('door open');
  }
  cutMains(minutes) {
    if (!this.mains) return;
    this.mainsLeft = minutes;
    this.mainsSince = this.minute;
    if (this.defrost) this.endDefrost('power');
    this.switchCompressor(false);
    this.tell('mains lost');
  }
  switchCompressor(on) {
    if (this.compressor === on) return;
    const ran = this.minute - this.compressorSince;
    this.compressor = on;
    this.compressorSince = this.minute;
    this.tell(on ? 'compressor on' : 'compressor off', { ran });
  }
  startDefrost(reason) {
    this.switchCompressor(false);
    this.defrostLeft = this.frozen ? this.dice.from(26, 44) : this.dice.from(14, 27);
    this.defrostSince = this.minute;
    this.tell('defrost start', { reason });
  }
  endDefrost(reason) {
    this.defrostLeft = 0;
    this.nextDefrost =
      this.minute + (this.frozen ? this.dice.from(660, 760) : this.dice.from(350, 420));
    this.tell('defrost end', { reason, took: this.minute - this.defrostSince });
  }

  step() {
    const { dice } = this;
    this.minute += 1;
    this.ambientBase = clamp(this.ambientBase + dice.from(-9000, 9000), 8 * DEGREE, 34 * DEGREE);
    this.ambient = this.ambientBase + triangle(this.minute - 240, DAY, 4 * DEGREE);

    if (this.doorLeft > 0 && --this.doorLeft === 0)
      this.tell('door closed', { open: this.minute - this.doorSince });
    if (this.mainsLeft > 0 && --this.mainsLeft === 0)
      this.tell('mains back', { away: this.minute - this.mainsSince });
    if (this.defrostLeft > 0) {
      if (--this.defrostLeft === 0) this.endDefrost('coil');
    } else if (this.mains && !this.door && this.minute >= this.nextDefrost) {
      this.startDefrost(dice.once(9) ? 'demand' : 'timer');
    }

    const cargoMean = toInteger((this.cargo[0] + this.cargo[1] + this.cargo[2]) / 3);
    if (this.mains && !this.defrost) {
      const seen = this.returned + dice.bell(0.3 * DEGREE);
      if (!this.frozen) this.switchCompressor(true);
      else if (seen > this.setPoint + 0.6 * DEGREE) this.switchCompressor(true);
      else if (seen < this.setPoint - 0.5 * DEGREE) this.switchCompressor(false);
    }
    this.heater =
      this.defrost || (this.mains && !this.frozen && this.supply < this.setPoint - 0.4 * DEGREE);

    if (this.defrost) {
      this.coil = towards(this.coil, 18 * DEGREE, 16);
      this.supply = towards(this.supply, this.coil - 3 * DEGREE, 9);
      this.returned = towards(this.returned, this.supply, 60);
    } else if (this.compressor && this.frozen) {
      this.coil = towards(this.coil, this.returned - 8 * DEGREE, 6);
      this.supply = towards(this.supply, this.coil + 3.5 * DEGREE, 5);
      this.returned = towards(this.returned, this.supply + 0.9 * DEGREE, 30);
    } else if (this.compressor) {
      const pull = this.supply > this.setPoint + 2 * DEGREE ? 11 : 7;
      this.coil = towards(this.coil, this.supply - 4 * DEGREE, 8);
      this.supply = towards(
        this.supply,
        this.setPoint + triangle(this.minute, this.swing, 0.24 * DEGREE),
        pull,
      );
      this.returned = towards(
        this.returned,
        this.supply + 0.8 * DEGREE + toInteger((this.ambient - this.supply) / 40),
        24,
      );
    } else {
      this.coil = towards(this.coil, this.returned, 20);
      this.supply = towards(this.supply, this.returned - 0.3 * DEGREE, 8);
    }
    this.returned = towards(this.returned, cargoMean, 150);
    this.returned = towards(this.returned, this.ambient, this.door ? 70 : 2600);
    if (this.door) this.supply = towards(this.supply, this.ambient, 70);
    for (let i = 0; i < 3; i++) {
      this.cargo[i] = towards(
        this.cargo[i],
        this.returned + (i - 1) * 0.25 * DEGREE,
        [1300, 2100, 1700][i],
      );
    }

    const damp = this.door
      ? 8800
      : this.defrost
        ? 9200
        : this.compressor
          ? this.frozen
            ? 6400
            : 8300
          : 7100;
    this.humidity = clamp(towards(this.humidity, damp, 18) + dice.from(-9, 9), 3000, 9990);
    this.battery = this.mains ? towards(this.battery, 4150, 240) : this.battery - 1;
    if (this.battery < 3300) this.battery = 3300;

    const off = Math.abs(this.supply - this.setPoint) > 4.5 * DEGREE && !this.defrost;
    if (off && ++this.outOfRange === 30) this.tell('out of range');
    if (!off) {
      if (this.outOfRange >= 30) this.tell('in range', { away: this.outOfRange });
      this.outOfRange = 0;
    }
  }
}

/** Where the container is, `minute` minutes into a voyage of `length` minutes: in the yard, on its way, at sea. */
function whereabouts(minute, length) {
  if (minute < 1.6 * DAY || minute > length - 1.4 * DAY) return 'yard';
  if (minute < 1.9 * DAY || minute > length - 1.7 * DAY) return 'quay';
  return 'sea';
}

/** What people do to the container: doors and plugs in port, now and then a look at sea. */
function handle(unit, place, dice) {
  if (place === 'yard') {
    if (dice.once(900)) unit.openDoor(dice.from(4, 26));
    if (dice.once(1500)) unit.cutMains(dice.from(20, 95));
  } else if (place === 'quay') {
    if (dice.once(160)) unit.cutMains(dice.from(70, 210));
  } else {
    if (dice.once(9 * DAY)) unit.openDoor(dice.from(3, 8));
    if (dice.once(4 * DAY)) unit.cutMains(dice.from(5, 40));
  }
}

// ---------------------------------------------------------------------------------------------------------------
// The ship's movement: a course kept by legs, a speed that wanders, a position in millionths of a degree.

class Track {
  constructor(dice, latitude, longitude, course, knots) {
    this.dice = dice;
    this.latitude = latitude * DEGREE;
    this.longitude = longitude * DEGREE;
    this.ordered = course * 100; // hundredths of a degree
    this.legCourse = this.ordered;
    this.course = this.ordered;
    this.economy = knots * 100; // hundredths of a knot
    this.service = this.economy;
    this.speed = 0;
  }
  /** Moves on by one minute. */
  step(sailing) {
    const { dice } = this;
    if (dice.once(1100)) this.legCourse = this.ordered + dice.from(-600, 600);
    this.course = towards(this.course, this.legCourse, 12) + dice.from(-22, 22);
    if (sailing && dice.once(300))
      this.service = clamp(
        this.service + dice.from(-90, 90),
        this.economy - 220,
        this.economy + 160,
      );
    this.speed =
      towards(this.speed, sailing ? this.service : 0, 25) + (sailing ? dice.from(-9, 9) : 0);
    if (!sailing && Math.abs(this.speed) < 30) this.speed = 0;
    // A knot is one minute of arc an hour: 1/3600 degree a minute. Speed has 2, the sine 4 decimal places.
    const path = this.speed / 360_000 / 10_000;
    this.latitude += toInteger(DEGREE * path * cosine(this.course));
    const shrink = cosine(toInteger(this.latitude / 10_000));
    this.longitude += toInteger((DEGREE * path * sine(this.course) * 10_000) / shrink);
  }
}

// ---------------------------------------------------------------------------------------------------------------
// telemetry.bin

const RECORD_BYTES = 24;

// One tracker after another, each on a voyage of its own: how the gateway files what it received.
const VOYAGES = [
  {
    records: 2620,
    setPoint: -1800,
    later: [[9.3, -2000]],
    from: [-30.2, 112.4],
    course: 267,
    knots: 14.4,
    boots: 11,
  },
  {
    records: 2380,
    setPoint: 1330,
    later: [],
    from: [-31.6, 33.1],
    course: 94,
    knots: 15.2,
    boots: 3,
  },
  {
    records: 2540,
    setPoint: -2000,
    later: [[1.2, -1800]],
    from: [-29.4, 111.8],
    course: 264,
    knots: 16.1,
    boots: 7,
  },
  {
    records: 2460,
    setPoint: 1330,
    later: [[6.2, 1250]],
    from: [-32.1, 34.0],
    course: 91,
    knots: 13.7,
    boots: 22,
  },
];

function telemetry() {
  const dice = new Dice('telemetry');
  const total = VOYAGES.reduce((sum, voyage) => sum + voyage.records, 0);
  const bytes = new Uint8Array(total * RECORD_BYTES);
  const view = new DataView(bytes.buffer);
  let at = 0;
  for (const voyage of VOYAGES) at = oneVoyage(dice, voyage, view, at);
  return bytes;
}

function oneVoyage(dice, voyage, view, at) {
  const unit = new CoolingUnit(dice, voyage.setPoint);
  const track = new Track(dice, voyage.from[0], voyage.from[1], voyage.course, voyage.knots);
  const length = toInteger(voyage.records * 10.2);
  const later = [...voyage.later];
  const sensorOffset = [
    dice.from(-12, 12),
    dice.from(-12, 12),
    dice.from(-25, 25),
    dice.from(-25, 25),
  ];
  const end = at + voyage.records * RECORD_BYTES;

  let boots = voyage.boots;
  let sequence = dice.from(20, 900);
  let lastReport = 0; // seconds
  let lastLatitude = toInteger(track.latitude / 100);
  let lastLongitude = toInteger(track.longitude / 100);
  let silent = 0; // reports still to be lost
  let signal = 88;
  let late = 0; // seconds by which a report comes after its time

  for (let minute = 1; at < end; minute++) {
    const place = whereabouts(minute, length);
    handle(unit, place, dice);
    if (later.length > 0 && minute >= later[0][0] * DAY) unit.changeSetPoint(later.shift()[1]);
    unit.step();
    track.step(place === 'sea');

    let afterBoot = false;
    if (dice.once(place === 'sea' ? 6 * DAY : 3 * DAY)) {
      // A restart: the counter begins again, and the time and the fix before it are forgotten.
      boots += 1;
      sequence = 0;
      afterBoot = true;
      late = 0;
      lastReport = minute * 60 - dice.from(38, 95);
      lastLatitude = toInteger(track.latitude / 100);
      lastLongitude = toInteger(track.longitude / 100);
    } else if (minute % 10 !== 0) {
      continue;
    }

    signal = clamp(towards(signal, 86, 9) + dice.bell(9), 58, 99);
    if (silent === 0 && dice.once(place === 'sea' ? 130 : 60))
      silent = dice.once(5) ? dice.from(2, 7) : 1;
    if (silent > 0 && !afterBoot) {
      silent -= 1;
      sequence = (sequence + 1) % 65536;
      continue;
    }

    late = dice.once(14) ? dice.from(4, 55) : Math.abs(dice.bell(5));
    const now = minute * 60 + late;
    const fix = !dice.once(90);
    // Fixes are good to a few ten-thousandths of a degree.
    const latitude = fix ? toInteger(track.latitude / 100) + dice.bell(3) : lastLatitude;
    const longitude = fix ? toInteger(track.longitude / 100) + dice.bell(3) : lastLongitude;
    const alarm = unit.outOfRange >= 30;
    const flags =
      Number(unit.door) |
      (Number(unit.compressor) << 1) |
      (Number(unit.defrost) << 2) |
      (Number(unit.mains) << 3) |
      (Number(fix) << 4) |
      (Number(alarm) << 5) |
      (Number(unit.heater) << 6);

    view.setUint16(at, Math.min(now - lastReport, 65535), true);
    view.setInt16(at + 2, toInteger(unit.setPoint / 10_000), true);
    view.setInt16(at + 4, toInteger(unit.supply / 10_000) + sensorOffset[0] + dice.bell(8), true);
    view.setInt16(at + 6, toInteger(unit.returned / 10_000) + sensorOffset[1] + dice.bell(6), true);
    view.setUint16(at + 8, toInteger(unit.humidity / 10) + dice.bell(4), true);
    view.setUint8(at + 10, flags);
    view.setUint8(at + 11, toInteger((unit.battery + dice.bell(14)) / 20));
    view.setInt16(at + 12, clamp(latitude - lastLatitude, -32768, 32767), true);
    view.setInt16(at + 14, clamp(longitude - lastLongitude, -32768, 32767), true);
    view.setInt16(
      at + 16,
      toInteger(unit.cargo[0] / 10_000) + sensorOffset[2] + dice.bell(3),
      true,
    );
    view.setInt16(
      at + 18,
      toInteger(unit.cargo[1] / 10_000) + sensorOffset[3] + dice.bell(3),
      true,
    );
    view.setUint16(at + 20, sequence, true);
    view.setUint8(at + 22, boots);
    view.setUint8(at + 23, signal);
    at += RECORD_BYTES;

    sequence = (sequence + 1) % 65536;
    lastReport = now;
    lastLatitude = latitude;
    lastLongitude = longitude;
  }
  return at;
}

// ---------------------------------------------------------------------------------------------------------------
// events.log: the controller of one container on four crossings, out frozen, back chilled.

const CROSSINGS = [-1800, 450, -1800, 450];
const CROSSING = 13 * DAY;

function isoTime(seconds) {
  return `${new Date(seconds * 1000).toISOString().slice(0, 19)}Z`;
}

function eventsLog() {
  const dice = new Dice('events');
  const lines = [];
  let seconds = START;
  const log = (level, code, text) => {
    seconds = Math.max(seconds, START + unit.minute * 60 + dice.from(0, 59));
    lines.push(`${isoTime(seconds)} ${level} ${code} ${text}`);
  };
  const signal = () => dice.from(36, 47);
  const tell = (what, details = {}) => {
    switch (what) {
      case 'compressor on':
        return log(
          'INF',
          101,
          `compressor on, return ${tenths(unit.returned)} C, ambient ${tenths(unit.ambient)} C`,
        );
      case 'compressor off':
        return log(
          'INF',
          102,
          `compressor off, return ${tenths(unit.returned)} C, ran ${details.ran} min`,
        );
      case 'defrost start':
        return log('INF', 110, `defrost start, coil ${tenths(unit.coil)} C, by ${details.reason}`);
      case 'defrost end':
        return log(
          'INF',
          111,
          `defrost end, coil ${tenths(unit.coil)} C, took ${details.took} min, by ${details.reason}`,
        );
      case 'set':
        return log(
          'INF',
          120,
          `set point ${tenths(details.before)} C to ${tenths(unit.setPoint)} C`,
        );
      case 'door open':
        return log('WRN', 130, `door open, supply ${tenths(unit.supply)} C`);
      case 'door closed':
        return log('INF', 131, `door closed, open ${details.open} min`);
      case 'mains lost':
        return log('WRN', 140, `mains lost, battery ${decimal(toInteger(unit.battery / 10), 2)} V`);
      case 'mains back':
        return log(
          'INF',
          141,
          `mains back after ${details.away} min, ${dice.from(432, 455)} V ${decimal(dice.from(597, 603), 1)} Hz`,
        );
      case 'out of range':
        return log(
          'ALM',
          160,
          `supply ${tenths(unit.supply)} C out of range for 30 min, set ${tenths(unit.setPoint)} C`,
        );
      case 'in range':
        return log(
          'INF',
          161,
          `supply ${tenths(unit.supply)} C in range after ${details.away} min`,
        );
    }
  };
  let report = 4100;
  let starts = 31;
  let kept = 0;
  let fanHigh = false;
  const unit = new CoolingUnit(dice, CROSSINGS[0], tell);
  for (let minute = 1; minute <= CROSSINGS.length * CROSSING; minute++) {
    const inCrossing = minute % CROSSING;
    if (inCrossing === 700) {
      unit.changeSetPoint(CROSSINGS[Math.floor(minute / CROSSING)]);
      unit.load();
    }
    handle(unit, whereabouts(inCrossing, CROSSING), dice);
    unit.step();

    if (minute % 120 === 0) {
      log(
        'INF',
        150,
        `air supply ${tenths(unit.supply)} C return ${tenths(unit.returned)} C humidity ${toInteger(unit.humidity / 100)} %RH`,
      );
    }
    if (minute % 240 === 60) {
      const [a, b, c] = unit.cargo.map(tenths);
      log('INF', 151, `cargo probes ${a} C ${b} C ${c} C`);
    }
    if (minute % 180 === 20 && unit.compressor) {
      const suction = 60 + toInteger((unit.coil / DEGREE + 40) * 3) + dice.bell(8);
      const discharge = 620 + toInteger((unit.ambient / DEGREE) * 27) + dice.bell(60);
      log(
        'INF',
        152,
        `suction ${suction} kPa discharge ${discharge} kPa current ${decimal(dice.from(74, 131), 1)} A`,
      );
    }
    if (minute % 60 === 5) {
      report += 1;
      if (kept === 0 && dice.once(14)) {
        log(
          'WRN',
          181,
          `report ${report} not acknowledged, signal ${signal()} dBHz, retry in ${dice.from(6, 18) * 10} s`,
        );
        if (dice.once(4)) kept = 1;
      } else if (kept > 0) {
        kept += 1;
        log('WRN', 182, `no link, kept ${kept} reports`);
        if (dice.once(3)) {
          log('INF', 183, `link back, sent ${kept} kept reports`);
          kept = 0;
        }
      } else if (minute % 180 === 5) {
        log(
          'INF',
          180,
          `report ${report} sent, ${dice.from(1, 4)} packets, signal ${signal()} dBHz`,
        );
      }
    }
    if (!fanHigh && unit.ambient > 25 * DEGREE && dice.once(50)) {
      fanHigh = true;
      log('INF', 170, `condenser fan high, ambient ${tenths(unit.ambient)} C`);
    } else if (fanHigh && unit.ambient < 23 * DEGREE && dice.once(50)) {
      fanHigh = false;
      log('INF', 171, `condenser fan low, ambient ${tenths(unit.ambient)} C`);
    }
    if (!unit.frozen && dice.once(2 * DAY)) {
      log(
        'INF',
        172,
        `fresh air vent ${dice.from(1, 5) * 5} m3/h, CO2 ${decimal(dice.from(3, 28), 1)} %`,
      );
    }
    if (dice.once(5 * DAY)) {
      starts += 1;
      report = 0;
      log(
        'WRN',
        190,
        `restart ${starts}, cause ${dice.pick(['watchdog', 'watchdog', 'brownout', 'command'])}`,
      );
      log('INF', 191, `self test passed, memory ${dice.from(38, 61)} kB free`);
    }
  }
  return `${lines.join('\n')}\n`;
}

// ---------------------------------------------------------------------------------------------------------------
// alerts.ndjson: what the ship's monitor sends on, for all containers on board. A slot is bay, row and tier. Values
// and limits are in tenths: of a degree, a percent, a volt, or of a minute where the value is a time (`lasts`).

const ALERTS = [
  { code: 'SUP_HIGH', severity: 2, overSetPoint: 15, over: [1, 38], often: 7 },
  { code: 'SUP_LOW', severity: 2, overSetPoint: -15, over: [-22, -1], often: 3 },
  { code: 'RET_HIGH', severity: 1, overSetPoint: 30, over: [1, 55], often: 8 },
  { code: 'PROBE_HIGH', severity: 3, overSetPoint: 20, over: [1, 17], often: 2 },
  { code: 'DEFROST_LONG', severity: 1, limit: 450, lasts: true, over: [1, 9], often: 4 },
  { code: 'HUMID_LOW', severity: 1, limit: 550, over: [-140, -3], often: 3 },
  { code: 'MAINS_OFF', severity: 2, limit: 50, lasts: true, over: [1, 9], often: 4 },
  { code: 'BATT_LOW', severity: 2, limit: 36, over: [-3, -1], often: 1 },
  { code: 'LINK_LOST', severity: 1, limit: 600, lasts: true, over: [1, 9], often: 5 },
];

function alerts() {
  const dice = new Dice('alerts');
  const often = ALERTS.flatMap((alert) => Array(alert.often).fill(alert));
  const two = (n) => String(n).padStart(2, '0');
  const slots = new Set();
  while (slots.size < 60) {
    slots.add(two(dice.from(3, 15) * 2) + two(dice.from(1, 9)) + two(80 + dice.from(1, 4) * 2));
  }
  const containers = [...slots].map((slot) => ({
    slot,
    setPoint: dice.pick([-200, -180, -180, 20, 45, 133]),
  }));
  const rows = [];
  const row = (time, slot, alert, value, limit, open) => {
    const text = `{"t":${time},"slot":"${slot}","code":"${alert.code}","sev":${alert.severity},"val":${decimal(value, 1)},"lim":${decimal(limit, 1)},"open":${open}}`;
    rows.push({ time, order: rows.length, text });
  };
  let time = START;
  for (let i = 0; i < 1120; i++) {
    time += dice.from(60, 8000);
    const { slot, setPoint } = dice.pick(containers);
    const alert = dice.pick(often);
    const limit = alert.limit ?? setPoint + alert.overSetPoint;
    const value = limit + dice.from(alert.over[0], alert.over[1]);
    row(time, slot, alert, value, limit, true);
    // One in nine is sent again while it is open. It closes with the value back inside its limit, or with how long
    // it lasted.
    const again = dice.once(9) ? time + dice.from(240, 9000) : 0;
    const closing = Math.max(time, again) + dice.from(240, 9000);
    const after = (later) => value + toInteger((later - time) / 6);
    if (again > 0) {
      const still = limit + dice.from(alert.over[0], alert.over[1]);
      row(again, slot, alert, alert.lasts ? after(again) : still, limit, true);
    }
    const inside = limit + (alert.over[0] > 0 ? -dice.from(1, 6) : dice.from(1, 6));
    row(closing, slot, alert, alert.lasts ? after(closing) : inside, limit, false);
  }
  rows.sort((a, b) => a.time - b.time || a.order - b.order);
  return `${rows.map(({ text }) => text).join('\n')}\n`;
}

// ---------------------------------------------------------------------------------------------------------------
// positions.csv: the ship's own track, one row each five minutes.

function positions() {
  const dice = new Dice('positions');
  const rows = ['time,lat,lon,speed_knots,course'];
  const track = new Track(dice, -30.62, 111.9, 265, 14.8);
  for (let minute = 1; rows.length <= 5000; minute++) {
    track.step(minute > 3.1 * DAY && minute < 14.4 * DAY);
    if (minute % 5 !== 0 || dice.once(150)) continue;
    const time = START + minute * 60 + (dice.once(20) ? dice.from(1, 9) : 0);
    const latitude = toInteger(track.latitude / 100) + dice.bell(3);
    const longitude = toInteger(track.longitude / 100) + dice.bell(3);
    const speed = Math.max(
      0,
      toInteger(track.speed / 10) + (track.speed > 0 ? dice.bell(3) : Number(dice.once(6))),
    );
    // At rest the receiver's course is noise around where the bow points.
    const course = toInteger(track.course / 100) + (track.speed > 0 ? dice.bell(2) : dice.bell(25));
    rows.push(
      `${time},${decimal(latitude, 4)},${decimal(longitude, 4)},${decimal(speed, 1)},${((course % 360) + 360) % 360}`,
    );
  }
  return `${rows.join('\n')}\n`;
}

// ---------------------------------------------------------------------------------------------------------------

/** The four files, by name, as bytes. */
export function generateDemo() {
  const text = new TextEncoder();
  return new Map([
    ['telemetry.bin', telemetry()],
    ['events.log', text.encode(eventsLog())],
    ['alerts.ndjson', text.encode(alerts())],
    ['positions.csv', text.encode(positions())],
  ]);
}

/** What sha256.txt holds for these files: one `hash  name` a line. */
export function listHashes(files) {
  const lines = [...files].map(
    ([name, bytes]) => `${createHash('sha256').update(bytes).digest('hex')}  ${name}\n`,
  );
  return lines.join('');
}

if (argv[1] !== undefined && import.meta.url === pathToFileURL(argv[1]).href) {
  const folder = dirname(fileURLToPath(import.meta.url));
  const files = generateDemo();
  for (const [name, bytes] of files) writeFileSync(join(folder, name), bytes);
  writeFileSync(join(folder, 'sha256.txt'), listHashes(files));
}
