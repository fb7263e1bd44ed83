// Loaded before a program: says its peak memory and its processor time when it ends.
process.on('exit', () => {
  const { maxRSS, userCPUTime, systemCPUTime } = process.resourceUsage();
  process.stderr.write(`peak ${maxRSS / 1024} MB, processor ${(userCPUTime + systemCPUTime) / 1e6} s\n`);
});
