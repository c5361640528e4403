export function buildWorker(): Promise<void>
export function buildWeb(signal?: AbortSignal): Promise<void>
