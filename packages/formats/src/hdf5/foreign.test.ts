import { execFileSync } from "node:child_process";
import { afterAll, beforeAll, expect, test } from "vitest";
import { removeTemporary, temporaryPath } from "../../test/odim-fixture.ts";
import { openHdf5 } from "./file.ts";
import { hdf5Ready } from "./library.ts";

beforeAll(hdf5Ready);
afterAll(removeTemporary);

/** Written by h5py, another binding of another build of the HDF5 library: what common Python writers leave behind. */
const WRITER = `
import sys, h5py, numpy
for layout in ("earliest", "latest"):
    with h5py.File(sys.argv[1] + layout, "w", libver=layout) as file:
        file.attrs["variable"] = "H5rad 2.3"
        file.attrs["fixed"] = numpy.bytes_("PVOL")
        file.attrs["long"] = 360
        file.attrs["big_endian"] = numpy.array(-1.25, dtype=">f8")
        file.attrs["texts"] = ["one", "two"]
        numbers = numpy.arange(600).reshape(20, 30)
        file.create_dataset("contiguous", data=numbers.astype(">u2"))
        file.create_dataset("chunked", data=numbers.astype("<i4"), chunks=(7, 11), compression="gzip", shuffle=True)
        file.create_dataset("checked", data=numbers.astype("f4") / 2, chunks=(20, 30), fletcher32=True)
        file.create_dataset("half", data=numbers.astype("f2"))
        file.create_dataset("never_written", shape=(20, 30), dtype="u1", chunks=(20, 30))
`;

// Needs Python with h5py: run where RAINRECKON_FOREIGN_TOOLS is 1, and a failure there if it is missing.
const foreign = process.env.RAINRECKON_FOREIGN_TOOLS === "1";

test.skipIf(!foreign).each(["earliest", "latest"])(
  "files written by h5py, %s layout (skipped unless RAINRECKON_FOREIGN_TOOLS is 1)",
  (layout) => {
    const stem = temporaryPath("h5py-");
    execFileSync("/usr/bin/python3", ["-c", WRITER, stem]);
    const file = openHdf5(stem + layout);
    const numbers = Array.from({ length: 600 }, (_, i) => i);
    expect(file.attribute("/", "variable")).toBe("H5rad 2.3");
    expect(file.attribute("/", "fixed")).toBe("PVOL");
    expect(file.attribute("/", "long")).toBe(360);
    expect(file.attribute("/", "big_endian")).toBe(-1.25);
    expect(file.attribute("/", "texts")).toEqual(["one", "two"]);
    expect(file.read("/contiguous")).toEqual(Uint16Array.from(numbers));
    expect(file.read("/chunked")).toEqual(Int32Array.from(numbers));
    expect(file.read("/checked")).toEqual(Float32Array.from(numbers, (number) => number / 2));
    expect(() => file.read("/half")).toThrow(/float16, which is not read/);
    expect(() => file.read("/never_written")).toThrow(/nothing of this array is stored/);
    file.close();
  },
);
