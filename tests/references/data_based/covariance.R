# Base R 4.2.2: least squares with lm; HC3 by its formula. Run: Rscript covariance.R > covariance.csv
# leprosy: the data of entry ancova-leprosy (Snedecor and Cochran 1967), groups A and F only.
# swiss: datasets::swiss, groups Catholic > 50 against the rest, as a check with several covariates.
cat("# ", R.version.string, "\n", sep = "")
cat("case,quantity,value\n")
report <- function(case, model, at) {
  table <- summary(model)$coefficients
  x <- model.matrix(model); h <- hatvalues(model); bread <- solve(crossprod(x))
  hc3 <- bread %*% crossprod(x * (residuals(model) / (1 - h))) %*% bread
  ends <- confint(model, at, level = 0.9)
  values <- c(estimate = table[at, 1], error = table[at, 2], t = table[at, 3], df = model$df.residual, p = table[at, 4],
              lower = ends[1], upper = ends[2], hc3_error = sqrt(hc3[at, at]))
  for (name in names(values)) cat(case, ",", name, ",", sprintf("%.15g", values[name]), "\n", sep = "")
}
pre <- c(11, 8, 5, 14, 19, 6, 10, 6, 11, 3, 16, 13, 11, 9, 21, 16, 12, 12, 7, 12)
post <- c(6, 0, 2, 8, 11, 4, 13, 1, 8, 0, 13, 10, 18, 5, 23, 12, 5, 16, 1, 20)
drug <- factor(rep(c("A", "F"), each = 10), levels = c("F", "A"))
report("leprosy", lm(post ~ drug + pre), "drugA")
swiss <- datasets::swiss
swiss$group <- factor(ifelse(swiss$Catholic > 50, "first", "second"), levels = c("second", "first"))
swiss$school <- factor(cut(swiss$Examination, c(0, 12, 20, 40), labels = c("few", "many", "most")))
report("swiss", lm(Fertility ~ group + Agriculture + Infant.Mortality + school, swiss), "groupfirst")
