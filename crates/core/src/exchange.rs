//! The border to other people's formats: tables that leave the program, and lists that come in.

pub mod drive_list;
pub mod reach_table;
