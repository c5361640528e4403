export interface Cluster { url: (database: string) => string, stop: () => Promise<unknown>, startedHere: boolean, programs: string, folder: string }
export function startScratchCluster(): Promise<Cluster>
export function startCluster(folder: string, options?: { scratch?: boolean }): Promise<Cluster>
