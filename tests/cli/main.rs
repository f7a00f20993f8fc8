//! The program as a stranger calls it: exit codes, what is printed where, what is written and what is left alone.

#![expect(clippy::unwrap_used, reason = "a test stops where a file is not as it should be")]

mod calls;
mod folders;
mod large;
#[path = "../helpers/site.rs"]
mod site;
mod stopping;
mod system;
