// Stands in for workers/measuring-child.ts: does what the file's name says.
if (process.env.ODD_CHILD === 'broken') process.exit(3);
process.on('disconnect', () => process.exit(1));
process.on('message', ({ task }) => {
  const deeds = {
    dies: () => process.kill(process.pid, 'SIGKILL'),
    leaves: () => process.exit(7),
    hangs: () => {},
    babbles: () => process.send({ kind: 'measured', figures: 'loud' }),
    answers: () => {
      process.send({ kind: 'progress', progress: { secondsDone: 1, secondsTotal: null } });
      process.send({
        kind: 'outcome',
        outcome: { kind: 'file', code: 'not-audio', message: `by ${process.pid}`, sha256: null },
      });
    },
  };
  deeds[task.fileName]();
});
process.send({ kind: 'ready' });
