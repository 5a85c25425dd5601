# The Longley data as NIST gives them (Statistical Reference Datasets, linear regression, "Longley"), for
# test/math/leastSquares.test.ts. Made by R 4.2.2 from its data set longley: Rscript longley.R > longley.json
# NIST counts gross national product, employment in thousands and the forces in units of R's scaled columns.
d <- datasets::longley
columns <- list(employed = round(1000 * d$Employed), deflator = d$GNP.deflator, gnp = round(1000 * d$GNP),
                unemployed = round(10 * d$Unemployed), armed_forces = round(10 * d$Armed.Forces),
                population = round(1000 * d$Population), year = d$Year)
rows <- sapply(names(columns), function(n) sprintf('  "%s": [%s]', n, paste(sprintf('%.17g', columns[[n]]), collapse = ', ')))
cat('{\n  "made_by": "longley.R, R 4.2.2",\n', paste(rows, collapse = ',\n'), '\n}\n', sep = '')
