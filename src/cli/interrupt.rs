//! Ctrl-C: the first asks to stop at the next replicate, the second ends the process at once.

use std::sync::Arc;
use std::sync::atomic::AtomicBool;

use signal_hook::consts::{SIGINT, SIGTERM};
use signal_hook::flag;

use super::FAILED;

/// A flag that is set once the user or the system asks to stop.
pub(super) fn stop_flag() -> std::io::Result<Arc<AtomicBool>> {
    let stop = Arc::new(AtomicBool::new(false));
    for signal in [SIGINT, SIGTERM] {
        // Registered first, so that it looks at the flag before this signal sets it.
        flag::register_conditional_shutdown(signal, i32::from(FAILED), Arc::clone(&stop))?;
        flag::register(signal, Arc::clone(&stop))?;
    }
    Ok(stop)
}
