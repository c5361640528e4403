import { createServer } from 'node:net'

/** Whether a port can be listened on, and if not why. */
export function tryPort(port, host = '127.0.0.1') {
  return new Promise((resolve) => {
    const server = createServer().on('error', error => resolve({ free: false, code: error.code }))
    server.listen(port, host, () => {
      const { port: given } = server.address()
      server.close(() => resolve({ free: true, port: given }))
    })
  })
}

export const freePort = async () => (await tryPort(0)).port
