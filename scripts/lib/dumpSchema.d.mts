export function dumpSchema(url: string, programs?: string): Promise<string>
