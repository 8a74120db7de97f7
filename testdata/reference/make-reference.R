# Writes every values.json below this folder that comes from R. Base R only.
#
#   Rscript testdata/reference/make-reference.R
#
# The files are found relative to this script, so the working directory does
# not matter. Run make-reference.py afterwards: it writes breslow-day/values.json
# and compares what both programs can compute.

script <- sub("^--file=", "", grep("^--file=", commandArgs(FALSE), value = TRUE))
reference_folder <- dirname(normalizePath(script))
data_folder <- dirname(reference_folder)

source(file.path(reference_folder, "json.R"))
source(file.path(reference_folder, "strata.R"))
source(file.path(reference_folder, "data.R"))

program <- paste("R", paste(R.version$major, R.version$minor, sep = "."))

# Order matters only where one script uses a function of an earlier one.
for (name in c("mantel-haenszel", "breslow-day", "standardization", "item-statistics", "multiplicity",
               "purification", "distributions", "population", "noncentral", "presented-sets",
               "polytomous-matching")) {
  source(file.path(reference_folder, name, "values.R"))
  cat("wrote", name, "\n")
}
