import { createHash } from "node:crypto";
import { readFileSync } from "node:fs";
import { join } from "node:path";
import { gunzipSync } from "node:zlib";

/**
 * SHA-256 over what is true of a storm: truth.json (which for a world holds a digest of all scans too), the
 * total, and the one-minute rates unpacked, so that another version of zlib does not matter.
 *
 * @param folder - where `generateStorm` wrote
 */
export function truthDigest(folder: string): string {
  const read = (name: string): Buffer => readFileSync(join(folder, "truth", name));
  return createHash("sha256")
    .update(read("truth.json"))
    .update(read("depth_total_mm.f32"))
    .update(gunzipSync(read("rain_rate.u16.gz")))
    .digest("hex");
}

/**
 * What `truthDigest` gives for each world of small size at seeds 1 and 11. A digest that changes means that the
 * world has changed: then every figure that was measured in it has to be measured again, and both said so.
 */
export const FROZEN: Readonly<Record<string, { readonly 1: string; readonly 11: string }>> = {
  "bright-band": {
    1: "d4905b7ae9828611d8adbabcc38d63f30eb49304e983e07bcf6f0065dbfdcf4f",
    11: "361351c026e29a88495410f261a93553a1cbb807f0a2ddf5b4261135d19c6665",
  },
  "blind-zone": {
    1: "386f4438037d3ea4dc0a0cd5bcf842d3a57281bdeba9b7cbf183c910c2ee21b3",
    11: "0539a2a911f65284e601d5478002ba58621c7d3024b636f7ea16b13b5c6453b1",
  },
  "warm-rain": {
    1: "a15c42e88aecceccc6abe5d0e1e77104bb8c9571664ca1b1b32bc41d9561cb92",
    11: "b4e66291c755df672994526152dbc588f8af813092afac2a2032038150d06d1c",
  },
  "false-echo": {
    1: "a49535d1c6b97f88dece9aad50382df1a76465d39fe8aa0337be20d7f4d6ff20",
    11: "344e76b93bd7b56fed6fcee7c92f47eb3ce914e4805afecce6a384639570f47b",
  },
  "blocked-sector": {
    1: "6b286248f996b47683e31b92fb539894ab80555b40c9d6664470c7d7cc612a7f",
    11: "905a83c12eb27f39b6b782ba98407c35119a0d2d974261a610f843b8f42a3f2c",
  },
  "calibration-low": {
    1: "1bb8fd087dd6094b34db444ccff6921a89dca98c8825df8a108bc2ad24986fda",
    11: "ee53997ba68c84ab68649807407e7fb101cf6579526db830c218c8c30f52bc07",
  },
  "calibration-true": {
    1: "78836bf1afdd7abb689f3104488c998eb43c4544572d6d0afa8921c259f51306",
    11: "a76c208b93bb7d31363e0e8f61f92e0fc7b23914b54762e48db97d1f06e0269e",
  },
  "calibration-high": {
    1: "537cdd9b85b3ce0ac2ab314dd8276807cd8c645492a24ca5073075e5bad9a875",
    11: "b0a23c9b43967c92d1a3280ff1f07e47012111c251caebab12d8972463c845f4",
  },
  hail: {
    1: "5a4c94900eeb842b8542e237f37c5fadc9c1056a2f732a260f4d2de295675d0f",
    11: "e6dad41cdea3353ed0e443ed08aa574ee5b3844746dc57009b4fa39d75711a3c",
  },
  "gauge-faults": {
    1: "236fe80bf9df4807a72a98fc93a089648bec81e6ee10a31d6bcf0f4d0541733a",
    11: "c271faafe650d5b75db666cb5c24030f8475819dfa0774debc2486e5e80c1a28",
  },
  "network-in-inches": {
    1: "2a894a60ec443e22528eaa09126761664b6232cf06ca01973883a2cf20f92c5f",
    11: "fe46a406bc4d551691b01ff128ed861673c37db584083be776cce1fbb479831c",
  },
  "network-clock-late": {
    1: "0da5d3443e22a53a6cbb55a15f40db9e40c430ee0845a97c2da7b2bef4b257d4",
    11: "d114f2ff0e75f54d6b024d85794c3c00560c9cd6b5383aa737e2783ba8f54c87",
  },
  cloudburst: {
    1: "adfd4eb3f196ac0c3bb12f4461d77e7dd66ae54620bb9e876fe78e2d2e960792",
    11: "2d83abafc70b84998954951cff7c3443a4c719394815850ae96d336627dc0ac6",
  },
  mixed: {
    1: "7af46cfd6980e37f6e4cd55fabfaf6ca6e56fd371be6efea07afab7ad225fbff",
    11: "06f4931b70c89f1160211c420b2c60ed0c8908d4f7347c16eb7c84000374c992",
  },
  "mixed-without-attenuation": {
    1: "8565b576eea4af0b0a8e665e66eeb8e831da688b1906433b32709e10b14e0385",
    11: "30615dbba722be5a62425505303eb7bb8d849c9b154c86127ab7114f69894b5e",
  },
  "mixed-without-false-echo": {
    1: "a0f3b561873a0598d0de73481afce6799011dc2eb5e8ab4d9d569a5d1606e52d",
    11: "b8c885118de6711c2755c0a57cbb725ffc56465d7aa57e0afe2861b32a72214a",
  },
  "mixed-without-bright-band": {
    1: "6b933ce3afc5c499deba2e32ff5f3018b3d4eaeb7f6b4d33704367b171e23940",
    11: "ba7ef95f3a6c88e048bf99ab83eab390ae06a64f13490ec2063c46a252e3fc6d",
  },
  "mixed-without-blockage": {
    1: "36e8a82b4ded9397d1e7ab4b46b8fe88eba73b7dcf02aa259b7fdac0b33cda70",
    11: "f003810ccfa7d58a88e218472957cb7d1907412a463458802046bcd55cd1fd63",
  },
  "mixed-without-calibration": {
    1: "6dcb48fc85e5a18fabb37276581f09a74d6a190af616af6929918131c2cb6e93",
    11: "62da48791d2976680b9730846d717fbd4b4560afe426f39f48457307a0dd2c53",
  },
  "mixed-without-hail": {
    1: "c733a07e27ce292d82e16d5723b641e926798f3928010fb1b9906c173c0371f9",
    11: "2550d21a3ef25094c7287175d204f834f93c38769c43cf41c2a4688966a8e163",
  },
};
