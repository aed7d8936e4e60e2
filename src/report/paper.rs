//! What paper needs that a screen does not: room to write.

use super::block::{Grid, Side};

/// A box to tick.
pub(super) const TICK: &str = "[\u{a0}\u{a0}]";

/// A line to write on.
pub(super) const LINE: &str = "______________________________";

/// Room for a reading, a time or initials.
const ROOM: &str = "________";

/// What is noted when a step is done.
pub(super) fn done() -> String {
    format!("Started at {ROOM}   Done at {ROOM}   Initials {ROOM}")
}

/// A table with lines to write on in its empty cells.
pub(super) fn with_room(grid: &Grid) -> Grid {
    let columns = grid.columns.iter().map(|c| (c.heading, c.side)).collect::<Vec<_>>();
    let mut with = Grid::new(&columns);
    let filled = |cell: &String| if cell.is_empty() { ROOM.to_string() } else { cell.clone() };
    with.rows = grid.rows.iter().map(|row| row.iter().map(filled).collect()).collect();
    with
}

/// A table with a row for everyone who signs.
pub(super) fn signatures(roles: &[&'static str]) -> Grid {
    let mut grid =
        Grid::new(&[("Who", Side::Left), ("Name", Side::Left), ("Signature", Side::Left), ("Date", Side::Left)]);
    for role in roles {
        let room = || ROOM.to_string();
        grid.row([(*role).to_string(), room(), room(), room()]);
    }
    grid
}
