# Total score of the 24 three-category items by group, and its coefficient alpha.

polytomous <- read.csv(file.path(data_folder, "verbal-aggression", "verbal-polytomous.csv"), check.names = FALSE)

write_values("polytomous-matching", c(
  list(program = program, check = "CV-40", data = "verbal-aggression/verbal-polytomous.csv"),
  group_values(as.matrix(polytomous[, -(1:2)]), polytomous$gender, verbal_reference, verbal_focal)))
