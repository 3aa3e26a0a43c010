/** The environment is not as it must be. Each problem is a sentence that names its variable and says what to do. */
export class ConfigError extends Error {
  constructor(readonly problems: readonly string[]) {
    super(`The settings in the environment are not right:\n${problems.map((problem) => `  ${problem}`).join('\n')}`)
    this.name = 'ConfigError'
  }
}
