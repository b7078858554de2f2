# Writes a nested list as JSON with 17 significant digits, so that a number read back is the same double.
# (No JSON package is needed.)
number_text <- function(x) ifelse(is.na(x), "null", sprintf("%.17g", x))

to_json <- function(x, indent = "") {
  inner <- paste0(indent, " ")
  if (is.list(x)) {
    values <- vapply(x, to_json, "", indent = inner)
    if (is.null(names(x))) return(paste0("[\n", paste0(inner, values, collapse = ",\n"), "\n", indent, "]"))
    return(paste0("{\n", paste0(inner, '"', names(x), '": ', values, collapse = ",\n"), "\n", indent, "}"))
  }
  text <- if (is.character(x)) paste0('"', gsub('"', '\\\\"', x), '"')
    else if (is.logical(x)) ifelse(x, "true", "false")
    else number_text(x)
  if (length(text) == 1 && !inherits(x, "AsIs")) text else paste0("[", paste0(text, collapse = ","), "]")
}

write_reference <- function(x, name) {
  path <- file.path("tests", "reference", name)
  writeLines(to_json(x), path)
  cat("wrote", path, "\n")
}

package_versions <- function(...) {
  names <- c(...)
  paste(c(R.version.string, sprintf("%s %s", names, vapply(names, function(p) as.character(packageVersion(p)), ""))),
        collapse = ", ")
}

# Reads the arrays of one of our own reference files back (flat numeric members only).
read_columns <- function(name, group) {
  lines <- readLines(file.path("tests", "reference", name))
  start <- grep(sprintf('^ "%s": \\{', group), lines)
  columns <- list()
  for (line in lines[(start + 1):length(lines)]) {
    if (grepl("^ \\}", line)) break
    key <- sub('^ *"([A-Za-z0-9]+)": .*$', "\\1", line)
    body <- sub(",$", "", sub('^ *"[A-Za-z0-9]+": ', "", line))
    if (grepl('^\\["', body)) columns[[key]] <- scan(text = gsub("[][]", "", body), what = "", sep = ",", quiet = TRUE)
    else columns[[key]] <- as.numeric(strsplit(gsub("[][]", "", body), ",")[[1]])
  }
  columns
}
