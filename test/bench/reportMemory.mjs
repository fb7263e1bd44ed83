// Loaded before a program: says its peak memory when it ends.
process.on('exit', () => {
  process.stderr.write(`peak ${Math.round(process.resourceUsage().maxRSS / 1024)}\n`);
});
