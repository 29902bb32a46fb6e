# Adjusted p-values from base R's p.adjust, for p_adjust.csv:  Rscript p_adjust.R > p_adjust.csv
# The p-values are made here, and written with 17 digits so that every other program reads the same numbers.
set.seed(20310311)
cases <- list(
  uniform = runif(40),
  few_effects = c(runif(25), runif(6)^6),
  tied = round(runif(30)^2, 2),
  zeros_and_ones = c(0, 1, 0.5, 0, 1, 1e-3),
  tiny = c(2^-1000, 2^-900, 2^-60, 2^-10, 2^-1),
  all_equal = rep(0.03125, 9),
  boundaries = 0.05 / (12:1),
  single = 0.04
)
cat("# program:", R.version.string, "; p.adjust of package stats; made by p_adjust.R\n")
methods <- c(bonferroni = "bonferroni", holm = "holm", benjamini_hochberg = "BH", hochberg = "hochberg",
             hommel = "hommel", benjamini_yekutieli = "BY")
cat("case,p,", paste(names(methods), collapse = ","), "\n", sep = "")
for (case in names(cases)) {
  p <- cases[[case]]
  adjusted <- do.call(cbind, c(list(p), lapply(methods, function(method) p.adjust(p, method))))
  for (i in seq_along(p)) cat(paste(c(case, sprintf("%.17g", adjusted[i, ])), collapse = ","), "\n", sep = "")
}
