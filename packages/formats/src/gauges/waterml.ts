import { createReadStream } from "node:fs";
import { stat } from "node:fs/promises";
import { InputError } from "@rainreckon/core";
import { SaxesParser, type SaxesTagNS } from "saxes";
import { readHeadBytes } from "./delimited.ts";
import { displayText } from "./display-text.ts";
import { GrowingNumbers } from "./growing.ts";

/*
 * WaterML 2.0 Part 1, Timeseries (OGC 10-126r4), as far as rain series need it. Names of interpolation types
 * and nil reasons are those of that standard and of SWE Common 2.0 (OGC 08-094r1); written from memory.
 */

const NAMESPACE = "http://www.opengis.net/waterml/2.0";
/** Largest file, deepest nesting and longest text of one element that are read. */
const MAX_XML_BYTES = 256 * 1024 ** 2;
const MAX_DEPTH = 100;
const MAX_TEXT_LENGTH = 10_000;
const MAX_SERIES = 20_000;

/** What the standard says of the time that a value speaks for, as far as a depth of rain can use it. */
export type WaterMlInterpolation =
  | "preceding-total"
  | "succeeding-total"
  | "preceding-average"
  | "succeeding-average"
  | "other";

/** One MeasurementTimeseries. */
export interface WaterMlSeries {
  /** gml:identifier of the monitoring point, else its gml:id, else the end of the reference to it. */
  readonly gaugeId: string;
  readonly name?: string;
  /** Where the file gives it in a geographic system; WGS 84 and ETRS89 are not told apart. */
  readonly position?: { readonly lonDeg: number; readonly latDeg: number };
  /** UCUM code: "mm", "[in_i]", "mm/h"; empty where the file gives none. */
  readonly uom: string;
  /** Undefined where the file gives none. */
  readonly interpolation?: WaterMlInterpolation;
  /** What is observed, in the file's words; empty where it gives none. */
  readonly property: string;
  /** Line of the element, from 1. */
  readonly line: number;
  /** Shape [n] each: stamps and values as written, why a value is nil ("" where it is not), quality, line. */
  readonly times: readonly string[];
  readonly texts: readonly string[];
  readonly nilReasons: readonly string[];
  readonly qualities: readonly string[];
  readonly lines: Float64Array;
}

interface MonitoringPoint {
  identifier: string;
  name: string;
  srs: string;
  pos: string;
}

interface OpenSeries {
  readonly observation: OpenObservation;
  readonly line: number;
  uom: string;
  interpolation: string;
  mixed: boolean;
  readonly times: string[];
  readonly texts: string[];
  readonly nilReasons: string[];
  readonly qualities: string[];
  readonly lines: GrowingNumbers;
}

interface OpenObservation {
  property: string;
  /** gml:id of the monitoring point, or what the reference says. */
  feature: string;
  featureTitle: string;
}

interface OpenPoint {
  time: string;
  value: string;
  nilReason: string;
  quality: string;
  readonly line: number;
}

/** Whether the head of a file is that of a WaterML 2.0 document. */
export function looksLikeWaterMl(head: string): boolean {
  return /^\s*</.test(head) && head.includes(NAMESPACE);
}

/**
 * Reads the measurement series of a WaterML 2.0 file.
 *
 * @throws InputError where it cannot be opened, is larger than 256 MiB, is no well-formed XML (with line and
 * column), declares a document type or uses entities of its own, or holds no measurement series
 */
export async function readWaterMl(path: string): Promise<readonly WaterMlSeries[]> {
  const head = await readHeadBytes(path);
  const { size } = await stat(path);
  if (size > MAX_XML_BYTES) {
    throw new InputError(
      `the file has ${size} bytes, more than ${MAX_XML_BYTES}`,
      path,
      "fetch shorter periods",
    );
  }
  const decoder = new TextDecoder(xmlEncoding(head, path), { fatal: true });
  const reader = new WaterMlReader(path);
  for await (const bytes of createReadStream(path)) {
    reader.write(decoded(decoder, bytes as Uint8Array, path));
  }
  reader.write(decoded(decoder, undefined, path));
  return reader.close();
}

/** The encoding by byte order mark, else by the XML declaration, else UTF-8 (XML 1.0, appendix F). */
function xmlEncoding(head: Uint8Array, path: string): string {
  if (head[0] === 0xff && head[1] === 0xfe) return "utf-16le";
  if (head[0] === 0xfe && head[1] === 0xff) return "utf-16be";
  const start = new TextDecoder("windows-1252").decode(head.subarray(0, 200));
  const named = /^(?:ï»¿)?<\?xml[^>]*?\sencoding\s*=\s*["']([\w.-]{1,40})["']/.exec(start)?.[1];
  if (named === undefined || /^(utf-?8|us-ascii|ascii)$/i.test(named)) return "utf-8";
  if (/^(iso-8859-1|latin-?1|windows-1252)$/i.test(named)) return "windows-1252";
  throw new InputError(`the encoding "${displayText(named, 40)}" is not read`, path, "write it in UTF-8");
}

function decoded(
  decoder: InstanceType<typeof TextDecoder>,
  bytes: Uint8Array | undefined,
  path: string,
): string {
  try {
    return bytes === undefined ? decoder.decode() : decoder.decode(bytes, { stream: true });
  } catch (cause) {
    throw new InputError(
      `there are bytes that are not ${decoder.encoding}`,
      path,
      "fetch the file again, or write it in UTF-8",
      { cause },
    );
  }
}

class WaterMlReader {
  readonly #path: string;
  readonly #parser = new SaxesParser({ xmlns: true, position: true });
  readonly #stack: string[] = [];
  readonly #points = new Map<string, MonitoringPoint>();
  readonly #series: OpenSeries[] = [];
  #sawRoot = false;
  #text = "";
  #observation: OpenObservation = { property: "", feature: "", featureTitle: "" };
  #monitoring: MonitoringPoint | undefined;
  #open: OpenSeries | undefined;
  #point: OpenPoint | undefined;

  constructor(path: string) {
    this.#path = path;
    const parser = this.#parser;
    parser.on("error", (fault) => {
      // The parser puts its own place before the words; the place is told apart from them here.
      const words = fault.message.replace(/^\d+:\d+: /, "").replace(/\.$/, "");
      throw this.#fault(`this is not well-formed XML: ${words}`, "fetch the file again");
    });
    parser.on("doctype", () => {
      throw this.#fault(
        "the file declares a document type, which may hold entities that unfold without end",
        "take the DOCTYPE out",
      );
    });
    parser.on("opentag", (tag) => this.#enter(tag));
    parser.on("closetag", (tag) => this.#leave(tag.local));
    parser.on("text", (text) => this.#addText(text));
    parser.on("cdata", (text) => this.#addText(text));
  }

  write(text: string): void {
    if (text !== "") this.#parser.write(text);
  }

  close(): WaterMlSeries[] {
    this.#parser.close();
    if (this.#series.length === 0) {
      throw new InputError(
        "there is no measurement series in the file",
        this.#path,
        "fetch a MeasurementTimeseries of WaterML 2.0",
      );
    }
    return this.#series.map((series) => this.#finish(series));
  }

  #fault(what: string, fix: string): InputError {
    const { line, column } = this.#parser;
    return new InputError(displayText(what, 300), `${this.#path}, line ${line}, column ${column}`, fix);
  }

  #addText(text: string): void {
    if (this.#text.length < MAX_TEXT_LENGTH) this.#text += text.slice(0, MAX_TEXT_LENGTH);
  }

  #enter(tag: SaxesTagNS): void {
    this.#stack.push(tag.local);
    if (this.#stack.length > MAX_DEPTH) {
      throw this.#fault(
        `elements are nested more than ${MAX_DEPTH} deep`,
        "this is no WaterML: leave it out",
      );
    }
    if (!this.#sawRoot) {
      this.#sawRoot = true;
      if (!Object.values(tag.ns).includes(NAMESPACE)) {
        throw this.#fault("the root element does not know WaterML 2.0", "give a WaterML 2.0 file");
      }
    }
    this.#text = "";
    const href = attribute(tag, "href");
    const title = attribute(tag, "title");
    switch (tag.local) {
      case "OM_Observation":
        this.#observation = { property: "", feature: "", featureTitle: "" };
        break;
      case "observedProperty":
        this.#observation.property = [title, href].filter((part) => part !== "").join(" ");
        break;
      case "featureOfInterest":
        this.#observation.feature = href;
        this.#observation.featureTitle = title;
        break;
      case "MonitoringPoint": {
        const id = attribute(tag, "id");
        this.#monitoring = { identifier: id, name: "", srs: "", pos: "" };
        if (this.#stack.includes("featureOfInterest")) this.#observation.feature = `#${id}`;
        this.#points.set(id, this.#monitoring);
        break;
      }
      case "Point":
      case "pos":
        if (this.#monitoring !== undefined) this.#monitoring.srs ||= attribute(tag, "srsName");
        break;
      case "MeasurementTimeseries":
        if (this.#series.length >= MAX_SERIES) {
          throw this.#fault(`there are more than ${MAX_SERIES} series`, "split the file");
        }
        this.#open = {
          observation: this.#observation,
          line: this.#parser.line,
          uom: "",
          interpolation: "",
          mixed: false,
          times: [],
          texts: [],
          nilReasons: [],
          qualities: [],
          lines: new GrowingNumbers(),
        };
        break;
      case "MeasurementTVP":
        this.#point = { time: "", value: "", nilReason: "", quality: "", line: this.#parser.line };
        break;
      case "value":
        if (this.#point !== undefined) {
          const nil = attribute(tag, "nil");
          if (nil === "true" || nil === "1") this.#point.nilReason ||= attribute(tag, "nilReason") || "nil";
        }
        break;
      case "nilReason":
        if (this.#point !== undefined && (href || title) !== "") this.#point.nilReason = href || title;
        break;
      case "quality":
        if (this.#point !== undefined) this.#point.quality = title || lastPart(href);
        break;
      case "uom":
        this.#say("uom", attribute(tag, "code"));
        break;
      case "interpolationType":
        this.#say("interpolation", href || title);
        break;
    }
  }

  /** A unit or interpolation of the series; one of a point that differs spoils the series. */
  #say(part: "uom" | "interpolation", word: string): void {
    const open = this.#open;
    if (open === undefined || word === "") return;
    if (open[part] === "") open[part] = word;
    else if (open[part] !== word) open.mixed = true;
  }

  #leave(local: string): void {
    this.#stack.pop();
    const text = this.#text.trim();
    this.#text = "";
    switch (local) {
      case "identifier":
        if (this.#monitoring !== undefined && text !== "") this.#monitoring.identifier = text;
        break;
      case "name":
        if (this.#monitoring !== undefined) this.#monitoring.name ||= text;
        break;
      case "pos":
        if (this.#monitoring !== undefined) this.#monitoring.pos = text;
        break;
      case "MonitoringPoint":
        this.#monitoring = undefined;
        break;
      case "time":
        if (this.#point !== undefined) this.#point.time = text;
        break;
      case "value":
        // Qualifiers have values too, within the metadata of the point.
        if (this.#point !== undefined && this.#stack.at(-1) === "MeasurementTVP") this.#point.value = text;
        break;
      case "MeasurementTVP":
        if (this.#open !== undefined && this.#point !== undefined) this.#keep(this.#open, this.#point);
        this.#point = undefined;
        break;
      case "MeasurementTimeseries":
        if (this.#open !== undefined) this.#series.push(this.#open);
        this.#open = undefined;
        break;
    }
  }

  #keep(open: OpenSeries, point: OpenPoint): void {
    open.times.push(point.time);
    open.texts.push(point.value);
    open.nilReasons.push(point.nilReason);
    open.qualities.push(point.quality);
    open.lines.push(point.line);
  }

  #finish(series: OpenSeries): WaterMlSeries {
    if (series.mixed) {
      throw new InputError(
        "units or interpolation types change within one series",
        `${this.#path}, line ${series.line}`,
        "fetch the series with one unit and one interpolation type",
      );
    }
    const { feature, featureTitle } = series.observation;
    const point = this.#points.get(feature.replace(/^.*#/, ""));
    const gaugeId = point?.identifier || lastPart(feature) || featureTitle;
    if (gaugeId === "") {
      throw new InputError(
        "the series does not say at which monitoring point it was observed",
        `${this.#path}, line ${series.line}`,
        "fetch it with om:featureOfInterest",
      );
    }
    const name = point?.name || featureTitle;
    const position = point === undefined ? undefined : positionOf(point);
    return {
      gaugeId,
      ...(name === "" ? {} : { name }),
      ...(position === undefined ? {} : { position }),
      uom: series.uom,
      ...(series.interpolation === "" ? {} : { interpolation: interpolationOf(series.interpolation) }),
      property: series.observation.property,
      line: series.line,
      times: series.times,
      texts: series.texts,
      nilReasons: series.nilReasons,
      qualities: series.qualities,
      lines: series.lines.view().slice(),
    };
  }
}

function attribute(tag: SaxesTagNS, local: string): string {
  for (const value of Object.values(tag.attributes)) if (value.local === local) return value.value.trim();
  return "";
}

/** The end of a reference: "https://example.org/points/0042" and "#0042" are "0042". */
function lastPart(reference: string): string {
  return (
    reference
      .replace(/[/#]+$/, "")
      .split(/[/#]/)
      .at(-1) ?? ""
  );
}

/** gml:pos under EPSG geographic codes is latitude before longitude, under CRS84 the other way round. */
function positionOf({ pos, srs }: MonitoringPoint): WaterMlSeries["position"] {
  const [first, second] = pos.split(/\s+/).map((part) => (part === "" ? Number.NaN : Number(part)));
  if (!Number.isFinite(first) || !Number.isFinite(second)) return undefined;
  if (/CRS84$/i.test(srs)) return { lonDeg: first, latDeg: second };
  // WGS 84 and ETRS89, two and three axes; other systems are not told apart here.
  if (!/\b(4326|4258|4979|4937)$/.test(srs)) return undefined;
  return { lonDeg: second, latDeg: first };
}

function interpolationOf(word: string): WaterMlInterpolation {
  const name = lastPart(word).replace(/[\s_-]/g, "");
  if (/^(TotalPrec(eding)?|PrecedingTotal)$/i.test(name)) return "preceding-total";
  if (/^(TotalSucc(eeding)?|SucceedingTotal)$/i.test(name)) return "succeeding-total";
  if (/^(AveragePrec(eding)?|PrecedingAverage|AverageinPrecedingInterval)$/i.test(name))
    return "preceding-average";
  if (/^(AverageSucc(eeding)?|SucceedingAverage|AverageinSucceedingInterval)$/i.test(name))
    return "succeeding-average";
  return "other";
}
