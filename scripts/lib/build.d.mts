export function buildWorker(): Promise<void>
export function buildWeb(): Promise<void>
