/** placeholder replaced below */
export interface BenchOptions {
  folder: string;
}
export async function generateBenchVolumes(_o: BenchOptions): Promise<void> {}
