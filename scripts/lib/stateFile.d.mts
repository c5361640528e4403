export function writeState(options: { url: string, dataDir: string, file: string, programs?: string }): Promise<string>
export function readState(options: { url: string, dataDir: string, file: string, replace: boolean, programs?: string }): Promise<{ version: string, madeAt: string, migrations: string[] }>
