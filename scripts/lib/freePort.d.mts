export function freePort(): Promise<number>
export function tryPort(port: number, host?: string): Promise<{ free: boolean, port?: number, code?: string }>
