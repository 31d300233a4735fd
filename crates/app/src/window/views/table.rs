//! The table of reflections: sorted, filtered, and smooth at any length, because the order of the rows is made only
//! when what it depends on changes and only the rows in sight are written.

mod cell;
mod column;
mod filter;
mod layout;
mod order;
mod parts;
mod view;
mod words;

pub use view::ReflectionTable;
