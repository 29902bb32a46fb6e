# Estimates of the share of true nulls by base R, for storey.csv:  Rscript storey.R > storey.csv
# The definitions of Storey & Tibshirani (2003), Storey, Taylor & Siegmund (2004) and the closed form of the bootstrap's
# mean squared error, written out; the spline is R's own smooth.spline. The p-values are made here.
set.seed(20310501)
cases <- list(
  half_null = c(runif(500), rbeta(500, 0.2, 4)),
  all_null = runif(300),
  few_null = c(runif(20), runif(180)^8),
  tied = round(c(runif(60), runif(40)^4), 2),
  short = c(runif(12), runif(3)^9),
  rising = 1 - runif(80)^2
)
points <- (1:19) / 20
cat("# program:", R.version.string, "; smooth.spline and quantile of package stats; made by storey.R\n")
cat("case,p,smoother,bootstrap\n")
for (case in names(cases)) {
  p <- as.numeric(sprintf("%.17g", cases[[case]]))
  beyond <- sapply(points, function(x) sum(p >= x))
  m <- length(p)
  share <- beyond / (m * (1 - points))
  spline <- smooth.spline(points, share, df = 3, control.spar = list(tol = 1e-10, maxit = 5000))
  smoothed <- predict(spline, x = 0.95)$y
  error <- beyond / (m^2 * (1 - points)^2) * (1 - beyond / m) + (share - quantile(share, 0.1))^2
  at_least <- share[which.min(error)]
  for (value in p) cat(case, sprintf(",%.17g,%.17g,%.17g\n", value, smoothed, at_least), sep = "")
}
