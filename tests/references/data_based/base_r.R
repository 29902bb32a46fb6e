# Base R on the samples of base_r_samples.csv: Rscript base_r.R > base_r.csv
samples <- read.csv("base_r_samples.csv", comment.char = "#")
cat("# made by base_r.R with", R.version.string, "\n")
cat("case,test,null_value,alternative,confidence,options,quantity,value\n")

side <- function(case, name) samples$value[samples$case == case & samples$side == name]
words <- c(greater = "above", less = "below", two.sided = "two_sided")

put <- function(case, test, null, alternative, confidence, options, result, location = TRUE) {
  row <- function(quantity, value) {
    cat(case, test, null, words[[alternative]], confidence, options, quantity, sprintf("%.17g\n", value), sep = ",")
  }
  row("p", result$p.value)
  if (!is.null(result$parameter)) row("df", result$parameter)
  if (location) row("statistic", result$statistic)
  if (alternative == "two.sided" && !is.null(result$conf.int)) {
    row("lower", result$conf.int[1])
    row("upper", result$conf.int[2])
    if (location && length(result$estimate) == 1) row("estimate", result$estimate)
  }
}

for (alternative in names(words)) {
  for (confidence in c(0.95, 0.8)) {
    for (null in c(0, 0.37)) {
      ask <- function(...) t.test(..., mu = null, alternative = alternative, conf.level = confidence)
      for (case in c("wear", "ratings", "refit", "meters")) {
        x <- side(case, "first")
        y <- side(case, "second")
        put(case, "one_sample_t", null, alternative, confidence, "", ask(x))
        put(case, "welch_t", null, alternative, confidence, "", ask(x, y))
        put(case, "student_t", null, alternative, confidence, "", ask(x, y, var.equal = TRUE))
        if (length(x) == length(y)) put(case, "paired_t", null, alternative, confidence, "", ask(x, y, paired = TRUE))
      }
      rank <- function(case, paired, exact) {
        # digits.rank: without it 0.3 - 0.2 and 0.2 - 0.1 would not be tied
        wilcox.test(side(case, "first"), side(case, "second"), mu = null, alternative = alternative,
                    conf.level = confidence, paired = paired, exact = exact, conf.int = exact, digits.rank = 10)
      }
      put("wear", "mann_whitney", null, alternative, confidence, "", rank("wear", FALSE, TRUE))
      put("refit", "wilcoxon_signed_rank", null, alternative, confidence, "", rank("refit", TRUE, TRUE))
      for (case in c("ratings", "meters")) {
        put(case, "mann_whitney", null, alternative, confidence, "method=normal", rank(case, FALSE, FALSE))
      }
      # R drops zeros, and uses the normal approximation where there are ties
      for (case in c("alarms", "valves")) {
        put(case, "wilcoxon_signed_rank", null, alternative, confidence, "method=normal zeros=dropped",
            rank(case, TRUE, FALSE))
      }
    }
    for (null in c(1, 0.4, 7)) {
      for (case in c("frost", "leaks")) {
        x <- side(case, "first")
        y <- side(case, "second")
        table <- matrix(c(sum(x), sum(y), sum(1 - x), sum(1 - y)), 2)
        result <- fisher.test(table, or = null, alternative = alternative, conf.level = confidence)
        # its two-sided p adds up the tables that are no more probable than the observed one
        put(case, "fisher_exact", null, alternative, confidence, "two_sided_by=smaller_probability", result, FALSE)
      }
    }
  }
}
