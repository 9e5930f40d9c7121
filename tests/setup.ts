import fc from 'fast-check'

// the same examples on every machine and every run: a failure can be looked at, and CI does not depend on luck
fc.configureGlobal({ seed: 20_260_302 })
