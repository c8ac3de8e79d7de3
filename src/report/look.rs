//! How text output looks: its width and whether classes are coloured.

use crate::judge::finding::Class;

/// Width where nothing says otherwise, in columns.
const WIDTH: usize = 80;

/// How text output looks.
#[derive(Clone, Copy, Debug)]
pub struct Look {
    /// Columns at which words fold.
    pub width: usize,
    /// Whether classes and marks are coloured; their words stand in the text either way.
    pub color: bool,
    /// Leave out what stops nothing: headings, practice, questions, assumptions, the closing line.
    pub quiet: bool,
}

impl Default for Look {
    fn default() -> Self {
        Self { width: WIDTH, color: false, quiet: false }
    }
}

impl Look {
    /// `text` in the colour of `class`.
    pub(crate) fn paint(self, class: Class, text: &str) -> String {
        // ISO 6429 (ECMA-48) select graphic rendition: bold, and the eight basic colours only.
        let code = match class {
            Class::Hazard => "1;31",
            Class::Damage => "31",
            Class::Malfunction => "33",
            Class::Margin => "36",
            Class::Practice => "2",
        };
        if self.color { format!("\u{1b}[{code}m{text}\u{1b}[0m") } else { text.to_owned() }
    }
}
