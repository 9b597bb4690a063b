// Projects to try things with. Machines and figures are invented.
import dredgerWinch from "../demos/dredger-winch.json";
import heaterZone from "../demos/heater-zone.json";
import levitatedRoller from "../demos/levitated-roller.json";
import pumpPressure from "../demos/pump-pressure.json";
import sampledAxis from "../demos/sampled-axis.json";

/** A demo and what it shows. */
export interface Demo {
  readonly name: string;
  readonly shows: string;
  readonly document: unknown;
}

/** All demos; the first greets a new user. */
export const DEMOS: readonly Demo[] = [
  { name: "Levitated roller (invented)", shows: "unstable at zero gain; a range with two ends", document: levitatedRoller },
  { name: "Dredger winch on a soft wire (invented)", shows: "two separate stable ranges", document: dredgerWinch },
  { name: "Pump pressure (invented)", shows: "a plain loop with three lags", document: pumpPressure },
  { name: "Heater zone ahead of a belt (invented)", shows: "dead time; a proportional band", document: heaterZone },
  { name: "Fast gantry axis, sampled (invented)", shows: "a sampled controller, one and a half periods late", document: sampledAxis },
];
