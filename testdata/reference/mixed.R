# Writes mixed.json in the working folder: invented samples in groups, and two sets of
# measurements from the literature, with one-way random-effects fits by lme4 and nlme.
# Needs Debian's r-base-core, r-cran-lme4 and r-cran-nlme.
#
#     cd testdata/reference && Rscript mixed.R
#
# Dyestuff and Dyestuff2 come with lme4: yields of six batches, from O. L. Davies (ed.),
# Statistical Methods in Research and Production, Oliver and Boyd 1947, and invented ones
# without variation between batches, from G. E. P. Box, G. C. Tiao, Bayesian Inference in
# Statistical Analysis, Addison-Wesley 1973. Both packages search numerically: lme4 finds
# the boundary tau = 0 exactly, nlme to 2e-4, and elsewhere tau to some 1e-6 of itself.
suppressMessages({library(lme4); library(nlme)})
options(digits = 17)
set.seed(1992)

invent <- function(sizes, mu, tau, phi) {
  g <- rep(seq_along(sizes), sizes)
  data.frame(y = round(mu + tau * rnorm(length(sizes))[g] + phi * rnorm(length(g)), 4), g = g)
}
cases <- list(
  dyestuff = data.frame(y = Dyestuff$Yield, g = as.integer(Dyestuff$Batch)),
  dyestuff2 = data.frame(y = Dyestuff2$Yield, g = as.integer(Dyestuff2$Batch)),
  balanced = invent(rep(5, 8), -2, 0.4, 0.5),
  unbalanced = invent(c(1, 2, 2, 3, 5, 8, 13, 21, 34, 1, 4, 6), -1.5, 0.35, 0.6),
  singles = invent(c(rep(1, 20), 2, 3, 2, 9), 0.7, 0.5, 0.5),
  two = invent(c(3, 17), -3, 0.5, 0.6),
  strong = invent(c(2, 3, 4, 5, 6, 7), 1, 2, 0.01),
  weak = invent(c(4, 9, 2, 12, 7, 3, 15, 1, 6, 10), -2, 0.1, 0.7),
  none = invent(c(4, 9, 2, 12, 7, 3, 15, 1, 6, 10), -2, 0, 0.7),
  swamped = invent(c(400, 1, 2, 1, 3, 2, 1, 4), -2.5, 0.45, 0.55))

number <- function(x) format(x, digits = 15, scientific = TRUE)
figures <- function(mu, se, tau, phi, loglik) {
  sprintf("{\"mu\": %s, \"mu_se\": %s, \"tau\": %s, \"phi\": %s, \"log_likelihood\": %s}",
          number(mu), number(se), number(tau), number(phi), number(loglik))
}
lme4Fit <- function(d, reml) {
  m <- suppressMessages(lmer(y ~ 1 + (1 | g), d, REML = reml,
    control = lmerControl("bobyqa", optCtrl = list(rhoend = 1e-10, maxfun = 100000), check.conv.singular = "ignore")))
  figures(fixef(m)[[1]], sqrt(vcov(m)[1, 1]), attr(VarCorr(m)$g, "stddev")[[1]], sigma(m), as.numeric(logLik(m)))
}
nlmeFit <- function(d, reml) {
  m <- lme(y ~ 1, random = ~ 1 | g, data = d, method = if (reml) "REML" else "ML",
    control = lmeControl(maxIter = 1000, msMaxIter = 1000, msTol = 1e-14, tolerance = 1e-12, returnObject = TRUE))
  figures(fixef(m)[[1]], sqrt(vcov(m)[1, 1]), as.numeric(VarCorr(m)[1, 2]), m$sigma, as.numeric(logLik(m)))
}
one <- function(name, d) {
  d$g <- factor(d$g)
  sprintf("  {\"name\": \"%s\",\n   \"y\": [%s],\n   \"group\": [%s],\n   \"lme4_reml\": %s,\n   \"nlme_reml\": %s,\n   \"lme4_ml\": %s,\n   \"nlme_ml\": %s}",
          name, paste(format(d$y, digits = 15, trim = TRUE), collapse = ", "), paste(as.integer(d$g), collapse = ", "),
          lme4Fit(d, TRUE), nlmeFit(d, TRUE), lme4Fit(d, FALSE), nlmeFit(d, FALSE))
}
text <- mapply(one, names(cases), cases)
cat(sprintf("{\n \"made_by\": \"mixed.R with R %s.%s, lme4 %s, nlme %s\",\n \"cases\": [\n%s\n ]\n}\n",
            R.version$major, R.version$minor, packageVersion("lme4"), packageVersion("nlme"),
            paste(text, collapse = ",\n")), file = "mixed.json")
