# Base R on the samples of base_r_shares_samples.csv and base_r_samples.csv: Rscript base_r_shares.R > base_r_shares.csv
files <- c("base_r_samples.csv", "base_r_shares_samples.csv")
samples <- do.call(rbind, lapply(files, read.csv, comment.char = "#"))
cat("# made by base_r_shares.R with", R.version.string, "\n")
cat("case,test,null_value,alternative,confidence,options,quantity,value\n")

side <- function(case, name) samples$value[samples$case == case & samples$side == name]
words <- c(greater = "above", less = "below", two.sided = "two_sided")
odds <- function(share) share / (1 - share)

put <- function(case, test, null, alternative, confidence, options, found) {
  for (quantity in names(found)) {
    value <- sprintf("%.17g\n", found[[quantity]])
    cat(case, test, null, words[[alternative]], confidence, options, quantity, value, sep = ",")
  }
}

# R's one-sided intervals have an end of their own: only the two-sided one is comparable
ends <- function(result, alternative, back = identity) {
  if (alternative != "two.sided") return(list())
  list(lower = back(result$conf.int[1]), upper = back(result$conf.int[2]))
}

for (alternative in names(words)) {
  for (confidence in c(0.95, 0.8)) {
    ask <- function(test, ...) test(..., alternative = alternative, conf.level = confidence)
    for (case in c("frost", "leaks", "vents", "latches")) {
      x <- side(case, "first")
      for (null in c(0.5, 0.02, 0.7)) {
        result <- ask(binom.test, sum(x), length(x), null)
        # its two-sided p adds up the counts that are no more probable than the observed one
        put(case, "binomial_exact", null, alternative, confidence, "two_sided_by=smaller_probability",
            c(list(p = result$p.value, statistic = sum(x), estimate = mean(x)), ends(result, alternative)))
      }
    }
    for (case in c("frost", "leaks", "vents")) {
      x <- side(case, "first")
      y <- side(case, "second")
      result <- ask(prop.test, c(sum(x), sum(y)), c(length(x), length(y)), correct = FALSE)
      z <- sign(mean(x) - mean(y)) * sqrt(result$statistic[[1]])
      for (test in c("risk_difference", "risk_ratio", "odds_ratio_score")) {
        null <- if (test == "risk_difference") 0 else 1
        put(case, test, null, alternative, confidence, "small_sample_factor=False",
            list(p = result$p.value, statistic = z))
      }
    }
    x <- side("closers", "first")
    y <- side("closers", "second")
    b <- sum(x > y)
    differ <- sum(x != y)
    for (null in c(1, 0.4, 3)) {
      share <- null / (1 + null)
      exact <- ask(binom.test, b, differ, share)
      found <- c(list(statistic = b), ends(exact, alternative, odds))
      # at 1 the two sides are symmetric, elsewhere R's two-sided p is another one
      if (alternative != "two.sided" || null == 1) found <- c(list(p = exact$p.value), found)
      put("closers", "mcnemar", null, alternative, confidence, "method=exact", found)
      normal <- ask(prop.test, b, differ, share, correct = FALSE)
      put("closers", "mcnemar", null, alternative, confidence, "method=normal",
          c(list(p = normal$p.value), ends(normal, alternative, odds)))
    }
    if (alternative == "two.sided") {
      result <- mcnemar.test(table(x, y), correct = FALSE)
      put("closers", "paired_risk_difference", 0, alternative, confidence, "",
          list(p = result$p.value, statistic = sign(mean(x) - mean(y)) * sqrt(result$statistic[[1]])))
    }
    for (null in c(1, 0.37, 2)) {
      for (case in c("wear", "ratings", "refit", "meters")) {
        result <- ask(var.test, side(case, "first"), side(case, "second"), ratio = null)
        put(case, "f_ratio", null, alternative, confidence, "",
            c(list(p = result$p.value, statistic = result$statistic[[1]], df = result$parameter[[1]],
                   estimate = result$estimate[[1]]), ends(result, alternative)))
      }
      for (case in c("ratings", "refit", "meters", "valves")) {
        result <- ask(t.test, log(side(case, "first")), log(side(case, "second")), mu = log(null))
        put(case, "ratio_of_geometric_means", null, alternative, confidence, "",
            c(list(p = result$p.value, statistic = result$statistic[[1]], df = result$parameter[[1]],
                   estimate = exp(result$estimate[[1]] - result$estimate[[2]])), ends(result, alternative, exp)))
      }
    }
  }
}
