/** Ports of the loopback address: which are free, which answer. */
import { connect, createServer } from 'node:net'

export const isFree = (port, host = '127.0.0.1') =>
  new Promise((resolve) => {
    const server = createServer()
    server.once('error', () => resolve(false))
    server.listen(port, host, () => server.close(() => resolve(true)))
  })

export const kernelPort = () =>
  new Promise((resolve, reject) => {
    const server = createServer()
    server.once('error', reject)
    server.listen(0, '127.0.0.1', () => {
      const { port } = server.address()
      server.close(() => resolve(port))
    })
  })

/** PostgreSQL's SSLRequest: length 8, code 80877103 (its manual, "Message Formats"); the answer is S or N. */
const sslRequest = Buffer.from([0, 0, 0, 8, 4, 210, 22, 47])

/** Whether a server there really speaks: the port of one killed a moment ago can still accept a connection. */
export const answers = (port) =>
  new Promise((resolve) => {
    const socket = connect(port, '127.0.0.1')
    const end = (answer) => {
      socket.destroy()
      resolve(answer)
    }
    socket.once('connect', () => socket.write(sslRequest))
    socket.once('data', (bytes) => end(bytes[0] === 0x53 || bytes[0] === 0x4e))
    socket.once('error', () => end(false))
    socket.once('close', () => end(false))
    socket.setTimeout(1000, () => end(false))
  })
