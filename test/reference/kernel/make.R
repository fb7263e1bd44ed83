# Local linear regression and direct plug-in bandwidths from R's package KernSmooth.
# Run: Rscript make.R > values.json     (Debian: apt-get install r-base-core r-cran-kernsmooth)
#
# Data: eruptions and waiting times of Old Faithful, `faithful` of R's package datasets (Azzalini & Bowman, A look at some
# data on the Old Faithful geyser, Appl. Statist. 39 (1990) 357).

library(KernSmooth)

numbers <- function(x) paste0("[", paste(format(x, digits = 15, trim = TRUE, scientific = FALSE), collapse = ", "), "]")

curve <- function(x, y, bandwidth, degree, drv, size) {
  fit <- locpoly(x, y, drv = drv, degree = degree, bandwidth = bandwidth, gridsize = size, range.x = widen(x))
  sprintf('{"bandwidth": %.15g, "degree": %d, "derivative": %d, "low": %.17g, "high": %.17g, "values": %s}',
          bandwidth, degree, drv, min(fit$x), max(fit$x), numbers(fit$y))
}

# The default range drops the datum at its upper end; a hair more keeps it.
widen <- function(x) c(min(x), max(x) + 1e-9 * diff(range(x)))

dataset <- function(name, x, y, curves) {
  sprintf('{"name": "%s", "x": %s, "y": %s,\n "plugIn": %.15g,\n "curves": [%s]}',
          name, numbers(x), numbers(y), dpill(x, y), paste(curves, collapse = ",\n "))
}

x <- faithful$eruptions
y <- faithful$waiting
set.seed(1)
u <- sort(runif(300))
v <- sin(9 * u) * exp(-u) + 0.3 * rnorm(300)
u <- round(u, 6)
v <- round(v, 6)

cat(sprintf('{"source": "%s, KernSmooth %s",\n"sets": [\n%s,\n%s]}\n',
  R.version.string, packageVersion("KernSmooth"),
  dataset("faithful", x, y, c(curve(x, y, 0.25, 1, 0, 61), curve(x, y, 0.6, 1, 0, 61), curve(x, y, 0.5, 3, 2, 61))),
  dataset("wave", u, v, c(curve(u, v, 0.04, 1, 0, 61), curve(u, v, 0.15, 1, 0, 61), curve(u, v, 0.15, 2, 1, 61)))))
