import type { Server } from 'node:http'
import type { Socket } from 'node:net'
import type { H3Event } from 'h3'

/** A large file may take longer than the five minutes that Node.js gives a request by itself. Only for signed-in callers. */
export function patientBody(event: H3Event): void {
  const socket = event.node.req.socket as Socket & { server?: Server }
  if (socket.server) socket.server.requestTimeout = 0
  socket.setTimeout(0)
}
