/** All benchmarks: `npm run bench`. Quote ratios and exponents, not seconds: machines differ. */
import { benchDistance } from './distance.js'
import { benchEstimate } from './estimate.js'
import { benchGeos } from './geos.js'
import { benchWhatIf } from './whatIf.js'
import { benchWholeRun } from './wholeRun.js'

benchEstimate()
await benchWholeRun()
await benchDistance()
await benchWhatIf()
benchGeos()
