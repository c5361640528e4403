/** The start command that launched this server is gone: nobody is left who could stop it. */
export default defineNitroPlugin(() => {
  if (process.send) process.on('disconnect', () => process.kill(process.pid, 'SIGTERM'))
})
