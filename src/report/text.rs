//! A page as text for a terminal.

use anstyle::{AnsiColor, Style};
use comfy_table::{Cell, CellAlignment, ContentArrangement, Table};
use comfy_table::{ColumnConstraint, LineStyle, Width, presets};

use super::document::{Block, Document};

/// Renders a page for a terminal of this width. Titles and the word "warning" carry styles, which the
/// caller strips where the output takes none.
pub fn text(document: &Document, width: u16) -> String {
    let mut out = String::new();
    let bold = Style::new().bold();
    let yellow = AnsiColor::Yellow.on_default().bold();
    let mut before: Option<&Block> = None;
    for block in &document.blocks {
        let close = matches!(
            (before, block),
            (Some(Block::Warning { .. }), Block::Warning { .. })
                | (Some(Block::Heading(_) | Block::Title(_)), _)
                | (Some(Block::Paragraph(_)), Block::Paragraph(_))
        );
        if before.is_some() && !close {
            out.push('\n');
        }
        match block {
            Block::Title(title) | Block::Heading(title) => {
                out += &styled(bold, title);
                out.push('\n');
            }
            Block::Paragraph(words) => out.push_str(&wrapped(words, width, "")),
            Block::Lines(lines) => {
                for line in lines {
                    out += &["  ", line, "\n"].concat();
                }
            }
            Block::Table { columns, rows } => {
                out.push_str(&table(columns, rows, width));
                out.push('\n');
            }
            Block::Warning { code, text } => {
                out += &[&styled(yellow, "warning"), " [", code, "]\n"].concat();
                out.push_str(&wrapped(text, width, "  "));
            }
        }
        before = Some(block);
    }
    out
}

/// Longer words may be broken.
const LONGEST_WHOLE_WORD: usize = 14;

fn table(columns: &[(String, bool)], rows: &[Vec<String>], width: u16) -> String {
    let mut table = Table::new();
    table
        .load_style(presets::UTF8_HORIZONTAL_ONLY.row_separator(LineStyle::none()))
        .set_content_arrangement(ContentArrangement::Dynamic)
        .set_width(width)
        .set_header(columns.iter().map(|(heading, _)| heading.as_str()));
    for row in rows {
        let cells = row.iter().zip(columns).map(|(cell, (_, number))| {
            let alignment = if *number { CellAlignment::Right } else { CellAlignment::Left };
            Cell::new(cell).set_alignment(alignment)
        });
        table.add_row(cells);
    }
    // No word is broken that a column can hold; the two blanks are the cell's own.
    for (index, column) in table.column_iter_mut().enumerate() {
        let cells = rows.iter().filter_map(|row| row.get(index));
        let words = cells.chain([&columns[index].0]).flat_map(|cell| cell.split_whitespace());
        let longest = words.map(|word| word.chars().count()).max().unwrap_or(0);
        let width = longest.min(LONGEST_WHOLE_WORD) as u16 + 2;
        column.set_constraint(ColumnConstraint::LowerBoundary(Width::Fixed(width)));
    }
    table.to_string().lines().map(str::trim_end).collect::<Vec<_>>().join("\n")
}

/// Text in a style.
fn styled(style: Style, text: &str) -> String {
    format!("{style}{text}{style:#}")
}

/// Words wrapped at blanks.
fn wrapped(words: &str, width: u16, indent: &str) -> String {
    let width = usize::from(width);
    let mut out = String::new();
    let mut line = indent.to_owned();
    for word in words.split_whitespace() {
        let gap = usize::from(line.len() > indent.len());
        if line.chars().count() + gap + word.chars().count() > width && line.len() > indent.len() {
            out.push_str(&line);
            out.push('\n');
            indent.clone_into(&mut line);
        }
        if line.len() > indent.len() {
            line.push(' ');
        }
        line.push_str(word);
    }
    out.push_str(&line);
    out.push('\n');
    out
}
