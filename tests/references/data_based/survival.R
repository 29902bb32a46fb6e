# R 4.2.2 with the package survival 3.5-3. Run: Rscript survival.R > survival.csv
# stratified: the patients of entry logrank-ovarian (Edmonson and others 1979), treatment 1 first, stratified by
# performance status; bearings: made-up times with many ties, in three strata, written out below.
suppressPackageStartupMessages(library(survival))
cat("# ", R.version.string, ", survival ", as.character(packageVersion("survival")), "\n", sep = "")
cat("case,quantity,value\n")
report <- function(case, time, status, first, stratum) {
  test <- survdiff(Surv(time, status) ~ first + strata(stratum))
  one <- survdiff(Surv(time, status) ~ first)
  cox <- coxph(Surv(time, status) ~ first + strata(stratum), ties = "efron", control = coxph.control(eps = 1e-12, toler.chol = 1e-13, iter.max = 100))
  total <- function(x) if (is.matrix(x)) rowSums(x) else x
  values <- c(log_rank = test$chisq, observed = total(test$obs)[2], expected = total(test$exp)[2], unstratified = one$chisq,
              coef = unname(coef(cox)), error = sqrt(vcov(cox)[1, 1]), likelihood_ratio = 2 * diff(cox$loglik))
  names(values)[2:3] <- c("observed", "expected")
  for (name in names(values)) cat(case, ",", name, ",", sprintf("%.15g", values[name]), "\n", sep = "")
}
with(survival::ovarian, report("stratified", futime, fustat, as.integer(rx == 1), ecog.ps))
number <- 0:59
time <- 3 + (number * 37) %% 17 + 4 * (number %% 2)
status <- as.integer((number * 5) %% 9 < 6)
report("bearings", time, status, as.integer(number %% 2 == 1), number %% 3)
