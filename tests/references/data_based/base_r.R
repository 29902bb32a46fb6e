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

# what base R has no test for, written out from its formulas; `found` are named numbers
put_numbers <- function(case, test, null, alternative, confidence, options, found) {
  for (name in names(found)) {
    if (alternative != "two.sided" && name %in% c("lower", "upper", "estimate")) next
    cat(case, test, null, words[[alternative]], confidence, options, name, sprintf("%.17g\n", found[[name]]), sep = ",")
  }
}
one_p <- function(alternative, above, below) {
  switch(alternative, greater = above, less = below, two.sided = min(1, 2 * min(above, below)))
}
by_t <- function(alternative, confidence, null, estimate, error, df) {
  t <- (estimate - null) / error
  half <- qt((1 + confidence) / 2, df) * error
  list(p = one_p(alternative, pt(-t, df), pt(t, df)), statistic = t, df = df, estimate = estimate,
       lower = estimate - half, upper = estimate + half)
}

sign_test <- function(d, null, alternative, confidence) {
  d <- round(d, 10)  # 0.3 - 0.2 and 0.1 are one difference
  n <- length(d)
  k <- qbinom((1 - confidence) / 2, n, 0.5)
  ends <- if (k > 0) sort(d)[c(k, n + 1 - k)] else c(-Inf, Inf)
  above <- sum(d > null)
  list(p = binom.test(above, sum(d != null), 0.5, alternative)$p.value, statistic = above, estimate = median(d),
       lower = ends[1], upper = ends[2])
}

yuen <- function(x, y, null, alternative, confidence, trim) {
  part <- function(x) {
    n <- length(x)
    g <- floor(trim * n)
    x <- sort(x)
    stay <- x[(g + 1):(n - g)]
    pulled <- pmin(pmax(x, min(stay)), max(stay))
    h <- length(stay)
    list(mean = mean(x, trim = trim), d = (n - 1) * var(pulled) / (h * (h - 1)), h = h)
  }
  a <- part(x)
  b <- part(y)
  df <- (a$d + b$d)^2 / (a$d^2 / (a$h - 1) + b$d^2 / (b$h - 1))
  by_t(alternative, confidence, null, a$mean - b$mean, sqrt(a$d + b$d), df)
}

brunner_munzel <- function(x, y, null, alternative, confidence) {
  above <- function(x, y) sapply(x, function(one) mean(y < one) + mean(y == one) / 2)
  v <- var(above(x, y)) / length(x)
  w <- var(above(y, x)) / length(y)
  df <- (v + w)^2 / (v^2 / (length(x) - 1) + w^2 / (length(y) - 1))
  by_t(alternative, confidence, null, mean(above(x, y)), sqrt(v + w), df)
}

# every way to form the groups, or to give signs, on whole thousandths: sums are exact
permuted <- function(x, y, null, alternative) {
  pooled <- round(1000 * c(x - null, y))
  sums <- colSums(matrix(pooled[combn(length(pooled), length(x))], length(x)))
  observed <- sum(pooled[seq_along(x)])
  list(p = one_p(alternative, mean(sums >= observed), mean(sums <= observed)), estimate = mean(x) - mean(y))
}
flipped <- function(d, null, alternative) {
  d <- round(1000 * (d - null))
  sums <- as.matrix(expand.grid(rep(list(c(-1, 1)), length(d)))) %*% d
  list(p = one_p(alternative, mean(sums >= sum(d)), mean(sums <= sum(d))), estimate = mean(d) / 1000 + null)
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

for (alternative in names(words)) {
  for (confidence in c(0.95, 0.8)) {
    for (null in c(0, 0.37)) {
      ask <- function(case, test, found, options = "") put_numbers(case, test, null, alternative, confidence, options, found)
      for (case in c("refit", "alarms", "valves")) {
        d <- side(case, "first") - side(case, "second")
        ask(case, "sign", sign_test(d, null, alternative, confidence))
      }
      for (case in c("wear", "ratings", "meters")) {
        x <- side(case, "first")
        y <- side(case, "second")
        ask(case, "one_sample_sign", sign_test(x, null, alternative, confidence))
        ask(case, "yuen_t", yuen(x, y, null, alternative, confidence, 0.2))
      }
      put("wear", "one_sample_wilcoxon", null, alternative, confidence, "",
          wilcox.test(side("wear", "first"), mu = null, alternative = alternative, conf.level = confidence,
                      exact = TRUE, conf.int = TRUE))
      for (case in c("ratings", "meters")) {
        put(case, "one_sample_wilcoxon", null, alternative, confidence, "method=normal zeros=dropped",
            wilcox.test(side(case, "first"), mu = null, alternative = alternative, exact = FALSE, digits.rank = 10))
      }
      if (confidence == 0.95) {
        ask("wear", "permutation_difference", permuted(side("wear", "first"), side("wear", "second"), null, alternative))
        ask("refit", "sign_flip_difference",
            flipped(side("refit", "first") - side("refit", "second"), null, alternative))
      }
    }
    for (null in c(0.5, 0.37)) {
      for (case in c("wear", "ratings", "meters")) {
        put_numbers(case, "brunner_munzel", null, alternative, confidence, "",
                    brunner_munzel(side(case, "first"), side(case, "second"), null, alternative, confidence))
      }
    }
  }
}
