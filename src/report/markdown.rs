//! A page as Markdown.

use super::document::{Block, Document};

/// Renders a page as Markdown with pipe tables.
pub fn markdown(document: &Document) -> String {
    let blocks: Vec<String> = document.blocks.iter().map(block).collect();
    blocks.join("\n")
}

fn block(block: &Block) -> String {
    match block {
        Block::Title(title) => format!("# {}\n", escaped(title)),
        Block::Heading(heading) => format!("## {}\n", escaped(heading)),
        Block::Paragraph(words) => format!("{}\n", escaped(words)),
        Block::Lines(lines) => format!("```text\n{}\n```\n", lines.join("\n")),
        Block::Warning { code, text } => format!("- **warning** `{code}`: {}\n", escaped(text)),
        Block::Table { columns, rows } => {
            let headings: Vec<String> =
                columns.iter().map(|(heading, _)| escaped(heading)).collect();
            let rules: Vec<&str> =
                columns.iter().map(|(_, number)| if *number { "--:" } else { "---" }).collect();
            let mut out = format!("| {} |\n| {} |\n", headings.join(" | "), rules.join(" | "));
            for row in rows {
                let cells: Vec<String> = row.iter().map(|cell| escaped(cell)).collect();
                out += &["| ", &cells.join(" | "), " |\n"].concat();
            }
            out
        }
    }
}

/// Text in which nothing is taken for markup.
fn escaped(text: &str) -> String {
    let mut out = String::with_capacity(text.len());
    for letter in text.chars() {
        match letter {
            '|' | '*' | '_' | '`' | '<' | '>' | '[' | ']' | '\\' | '#' => {
                out.push('\\');
                out.push(letter);
            }
            '\n' | '\r' => out.push(' '),
            _ => out.push(letter),
        }
    }
    out
}
