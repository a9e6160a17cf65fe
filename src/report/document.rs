//! A report as data: what stands on the page, before it is known how it is drawn.

/// A page.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Document {
    /// What stands on it, from top to bottom.
    pub blocks: Vec<Block>,
}

/// A part of a page.
#[derive(Clone, Debug, PartialEq)]
pub enum Block {
    /// The title of the page.
    Title(String),
    /// The heading of what follows.
    Heading(String),
    /// Words.
    Paragraph(String),
    /// Lines that are not wrapped: equations.
    Lines(Vec<String>),
    /// A table.
    Table {
        /// Headings of the columns, each with whether its cells are numbers.
        columns: Vec<(String, bool)>,
        /// The rows, cell by cell.
        rows: Vec<Vec<String>>,
    },
    /// A caveat: its code and its words.
    Warning {
        /// The code.
        code: String,
        /// The words.
        text: String,
    },
}

impl Document {
    pub(super) fn title(&mut self, text: impl Into<String>) {
        self.blocks.push(Block::Title(text.into()));
    }

    pub(super) fn heading(&mut self, text: impl Into<String>) {
        self.blocks.push(Block::Heading(text.into()));
    }

    pub(super) fn paragraph(&mut self, text: impl Into<String>) {
        self.blocks.push(Block::Paragraph(text.into()));
    }

    pub(super) fn lines(&mut self, lines: impl IntoIterator<Item = String>) {
        self.blocks.push(Block::Lines(lines.into_iter().collect()));
    }

    /// A table; a heading that starts with `#` marks a column of numbers.
    pub(super) fn table(&mut self, columns: &[&str], rows: Vec<Vec<String>>) {
        let columns = columns
            .iter()
            .map(|heading| match heading.strip_prefix('#') {
                Some(rest) => (rest.to_owned(), true),
                None => ((*heading).to_owned(), false),
            })
            .collect();
        self.blocks.push(Block::Table { columns, rows });
    }

    pub(super) fn warnings(&mut self, warnings: &[crate::diagnostic::Warning]) {
        for warning in warnings {
            self.blocks.push(Block::Warning {
                code: warning.code.as_str().to_owned(),
                text: warning.text.clone(),
            });
        }
    }
}
