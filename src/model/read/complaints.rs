//! The TOML parser's complaints, in plain words.

/// A complaint: how the parser's begins, then our code, message and cure.
type Complaint = (&'static str, &'static str, &'static str, &'static str);

/// The first that fits is taken.
static COMPLAINTS: &[Complaint] = &[
    (
        "cannot recurse further",
        "too-deep",
        "tables or keys are nested too deeply",
        "a model nests at most a few levels",
    ),
    ("recursion limit", "too-deep", "tables or keys are nested too deeply", "a model nests at most a few levels"),
    ("key with no value", "syntax", "a key without `=`", "write KEY = VALUE, or begin a comment with #"),
    ("missing value", "syntax", "nothing stands behind `=`", "write a value there, or take the line out"),
    (
        "unexpected key or value",
        "syntax",
        "something follows the value on the same line",
        "begin a new line, or a comment with #",
    ),
    ("unclosed table", "syntax", "`]` is missing here", "a table begins with [SECTION.NAME]; names have no blanks"),
    ("unclosed array table", "syntax", "`]]` is missing here", "a table begins with [SECTION.NAME]"),
    ("unclosed array", "syntax", "a list is not closed", "close it with `]`"),
    ("unclosed inline table", "syntax", "a table is not closed", "close it with `}`"),
    ("missing comma", "syntax", "a comma is missing", "put a comma between any two entries"),
    ("extra comma", "syntax", "a comma too many", "take it out"),
    ("extra `=`", "syntax", "`=` stands twice", "take one out"),
    ("missing assignment", "syntax", "an entry of a table must be KEY = VALUE", "write for example { kiln = 0.02 }"),
    (
        "missing key for inline table",
        "syntax",
        "an entry of a table must be KEY = VALUE",
        "write for example { kiln = 0.02 }",
    ),
    ("invalid inline table", "syntax", "an entry of a table must be KEY = VALUE", "write for example { kiln = 0.02 }"),
    (
        "invalid unquoted key",
        "syntax",
        "without quotes a key holds only a-z, A-Z, 0-9, `_` and `-`",
        "put the key in double quotes",
    ),
    (
        "unquoted keys cannot be empty",
        "syntax",
        "a key or a name is missing here",
        "write for example [resources.kiln]",
    ),
    (
        "cannot extend value",
        "syntax",
        "this name already stands for a value, so nothing can lie within it",
        "rename one of the two",
    ),
    (
        "missing escaped value",
        "syntax",
        "a backslash begins an escape, and this is none",
        "write two backslashes for one",
    ),
    ("invalid basic string, expected `\"`", "syntax", "a text is not closed", "close it with a double quote"),
    ("invalid literal string, expected `'`", "syntax", "a text is not closed", "close it with a single quote"),
    (
        "invalid basic string",
        "syntax",
        "a text holds a control character",
        "take it out, or write it as an escape such as \\t",
    ),
    ("invalid literal string", "syntax", "a text holds a control character", "take it out"),
    ("invalid multi-line", "syntax", "a text in triple quotes is not written right", "close it with the same quotes"),
    ("keys cannot be multi-line", "syntax", "triple quotes where a key is meant", "a text stands behind KEY ="),
    ("invalid comment character", "syntax", "a comment holds a control character", "take it out"),
    ("unexpected leading zero", "syntax", "a number does not begin with 0", "take the leading 0 out"),
    ("invalid date", "syntax", "this is not a date", "put a text, such as the name of a period, in double quotes"),
    ("invalid time", "syntax", "this is not a time", "put a text in double quotes"),
    ("invalid key-value pair", "syntax", "a key is missing here", "write KEY = VALUE"),
    ("missing table open", "syntax", "`[` is missing", "a table begins with [SECTION.NAME]"),
    ("missing array opening", "syntax", "`]` without `[`", "take it out, or open the list"),
    ("missing inline table opening", "syntax", "`}` without `{`", "take it out, or open the table"),
];

/// Parts of complaints about numbers.
static ABOUT_NUMBERS: &[&str] = &["float", "integer", "digit", "number", "exponent", "sign", "`_` may only", "radix"];

/// The code, message and cure for what the parser says; no message where its own words must do.
pub(super) fn plain(told: &str) -> (&'static str, Option<&'static str>, &'static str) {
    if let Some((_, code, message, help)) = COMPLAINTS.iter().find(|(start, ..)| told.starts_with(start)) {
        return (code, Some(message), help);
    }
    if ABOUT_NUMBERS.iter().any(|part| told.contains(part)) {
        return ("syntax", Some("this is not a number"), "write for example 168, 0.02 or 1e6");
    }
    ("syntax", None, "")
}
