//! Directives: which line carries what, by its first word.

use super::model::StatementForm;
use super::words::Mode;

/// What the reader does at a directive.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Directive {
    /// A statement with words.
    Statement(StatementForm, Mode),
    /// Nothing for connectivity: passed over with its continuation lines.
    Skip,
    /// A block that is passed over up to the directive that ends it.
    SkipTo(&'static str),
    /// `.prot` and kin: what follows may be encrypted.
    Protected,
    /// The title in another place.
    Title,
    /// None that is known: passed over, and said once a file.
    Unknown,
}

/// Directives that carry nothing for connectivity.
const SKIPPED: &[&str] = &[
    "ac",
    "acmodel",
    "backanno",
    "bias",
    "biaschk",
    "check",
    "dc",
    "dcvolt",
    "del",
    "disto",
    "distribution",
    "dout",
    "enddata",
    "endc",
    "endaliases",
    "external",
    "endalias",
    "four",
    "fourier",
    "graph",
    "hb",
    "hdl",
    "ic",
    "iic",
    "lin",
    "loadbias",
    "mc",
    "meas",
    "measure",
    "net",
    "nodeset",
    "noise",
    "op",
    "opt",
    "option",
    "options",
    "plot",
    "print",
    "probe",
    "probe64",
    "pss",
    "pz",
    "save",
    "savebias",
    "sens",
    "sn",
    "sp",
    "stb",
    "step",
    "stimlib",
    "stimulus",
    "temp",
    "temperature",
    "text",
    "tf",
    "tolerance",
    "tran",
    "unprot",
    "unprotect",
    "vector",
    "watch",
    "wave",
    "wcase",
    "width",
    "csparam",
    "endmachine",
    "store",
    "malias",
    "autostop",
    "nosave",
];

/// The directive called `name` (without its dot), letter case aside.
pub(super) fn named(name: &str) -> Directive {
    use Directive::{Protected, Skip, SkipTo, Statement, Title, Unknown};
    use StatementForm as Form;
    let mut folded = [0u8; 16];
    let Some(folded) = folded.get_mut(..name.len()) else { return Unknown };
    folded.copy_from_slice(name.as_bytes());
    folded.make_ascii_lowercase();
    let Ok(name) = std::str::from_utf8(folded) else { return Unknown };
    match name {
        "subckt" | "subcircuit" | "macro" | "subc" => Statement(Form::Subckt, Mode::Names),
        "ends" | "eom" => Statement(Form::Ends, Mode::Names),
        "model" | "mod" => Statement(Form::Model, Mode::Values),
        "param" | "params" | "parameter" | "parameters" => Statement(Form::Param, Mode::Values),
        "func" | "function" => Statement(Form::Function, Mode::Values),
        "include" | "inc" | "incl" => Statement(Form::Include, Mode::Paths),
        "lib" | "library" => Statement(Form::Lib, Mode::Paths),
        "endl" | "endlib" => Statement(Form::EndLib, Mode::Paths),
        "global" => Statement(Form::Global, Mode::Names),
        "if" => Statement(Form::If, Mode::Values),
        "elseif" | "elif" => Statement(Form::ElseIf, Mode::Values),
        "else" => Statement(Form::Else, Mode::Values),
        "endif" => Statement(Form::EndIf, Mode::Values),
        "end" => Statement(Form::End, Mode::Names),
        "control" => SkipTo("endc"),
        "data" => SkipTo("enddata"),
        "alias" | "aliases" => SkipTo("endaliases"),
        "machine" => SkipTo("endmachine"),
        "prot" | "protect" => Protected,
        "title" => Title,
        other if SKIPPED.contains(&other) => Skip,
        _ => Unknown,
    }
}

/// The length of the directive's name at the start of `text`, which follows the dot.
pub(super) fn name_length(text: &str) -> usize {
    text.bytes().position(|byte| !byte.is_ascii_alphanumeric() && byte != b'_').unwrap_or(text.len())
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn check(name: &str, expected: Directive) {
        assert_eq!(named(name), expected, "{name}");
        assert_eq!(named(&name.to_uppercase()), expected, "{name}");
    }

    #[test]
    fn directives_are_told_by_name_in_any_letter_case() {
        check("subckt", Directive::Statement(StatementForm::Subckt, Mode::Names));
        check("inc", Directive::Statement(StatementForm::Include, Mode::Paths));
        check("tran", Directive::Skip);
        check("control", Directive::SkipTo("endc"));
        check("bogus", Directive::Unknown);
        check("averyveryverylongname", Directive::Unknown);
        check("", Directive::Unknown);
    }

    #[test]
    fn a_name_ends_where_its_letters_end() {
        assert_eq!(name_length("if(a==1)"), 2);
        assert_eq!(name_length("end;x"), 3);
        assert_eq!(name_length("op"), 2);
    }
}
