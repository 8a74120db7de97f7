# A small JSON writer: numbers with 17 significant digits, so that reading them
# back gives the same double.
#
# A named list becomes an object, an unnamed list an array over several lines, a
# matrix an array of rows, a vector an array on one line, a vector of length one
# a plain value (wrap it in I() to keep the brackets), NULL and NA become null.

json_scalar <- function(value) {
  if (is.na(value)) return("null")
  if (is.logical(value)) return(if (value) "true" else "false")
  if (is.character(value)) return(encodeString(value, quote = "\""))
  if (!is.finite(value)) stop("a number that is not finite has no place in JSON")
  sprintf("%.17g", value)
}

json_row <- function(values) {
  paste0("[", paste(vapply(values, json_scalar, ""), collapse = ", "), "]")
}

json <- function(value, indent = "") {
  if (is.null(value)) return("null")
  deeper <- paste0(indent, "  ")
  if (is.matrix(value)) {
    rows <- vapply(seq_len(nrow(value)), function(i) json_row(value[i, ]), "")
    per_line <- if (ncol(value) <= 6) 4 else 1
    lines <- tapply(rows, (seq_along(rows) - 1) %/% per_line, paste, collapse = ", ")
    return(paste0("[\n", paste0(deeper, lines, collapse = ",\n"), "\n", indent, "]"))
  }
  if (is.list(value)) {
    if (length(value) == 0) return("[]")
    parts <- vapply(value, json, "", indent = deeper)
    if (!is.null(names(value))) parts <- paste0("\"", names(value), "\": ", parts)
    brackets <- if (is.null(names(value))) c("[", "]") else c("{", "}")
    return(paste0(brackets[1], "\n", paste0(deeper, parts, collapse = ",\n"), "\n", indent, brackets[2]))
  }
  if (length(value) == 1 && !inherits(value, "AsIs")) return(json_scalar(value))
  json_row(unclass(value))
}

write_values <- function(name, value, file = "values.json") {
  writeLines(json(value), file.path(reference_folder, name, file))
}
