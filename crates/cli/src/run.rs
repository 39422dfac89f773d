//! What a command hands back.

use crate::output::Outputs;

/// A finished command: what it leaves, its exit code, and remarks for standard error.
pub struct Done {
    /// Files and standard output.
    pub outputs: Outputs,
    /// 0, or 3, 4, 5 as the help says.
    pub exit_code: u8,
    /// Sentences for standard error, unless `--quiet`.
    pub remarks: Vec<String>,
}
