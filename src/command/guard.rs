//! What protects the world from us, and us from the world: interrupts, panics,
//! deep recursion.

use std::sync::{Mutex, MutexGuard, PoisonError};
use std::time::Duration;

use super::exit::Exit;
use super::output;

/// Stack of the working thread. Depth of input is limited everywhere; this
/// leaves room for debug builds, whose frames are several times larger.
pub const STACK: usize = 256 * 1024 * 1024;

/// Held while a file is being replaced or a result is being written, so that an
/// interrupt waits for a short moment instead of leaving half of it.
static WRITING: Mutex<()> = Mutex::new(());

/// Keeps interrupts out until the guard is dropped.
pub fn uninterrupted() -> MutexGuard<'static, ()> {
    WRITING.lock().unwrap_or_else(PoisonError::into_inner)
}

/// From now on an interrupt or a request to terminate ends the process with
/// code 130, after a write in progress is complete (at most two seconds later,
/// since a reader that has stopped reading must not keep us alive).
pub fn stop_on_interrupt() {
    // If the handler cannot be set, the system's own action remains: the process
    // ends, and files are still replaced whole or not at all.
    let _ = ctrlc::set_handler(|| {
        let mut written = WRITING.try_lock();
        for _ in 0..200 {
            if written.is_ok() {
                break;
            }
            std::thread::sleep(Duration::from_millis(10));
            written = WRITING.try_lock();
        }
        output::tell("\nboundwright: interrupted\n");
        std::process::exit(i32::from(Exit::Interrupted.code()));
    });
}

/// Runs `work` on a thread with a large stack.
///
/// # Errors
/// If it panicked; the panic has then been told on standard error.
pub fn shielded<T: Send + 'static>(work: impl FnOnce() -> T + Send + 'static) -> Result<T, ()> {
    std::panic::set_hook(Box::new(|panic| {
        let what = panic.payload();
        let what = what
            .downcast_ref::<&str>()
            .map(|text| (*text).to_string())
            .or_else(|| what.downcast_ref::<String>().cloned())
            .unwrap_or_else(|| "unknown".to_string());
        let place = panic.location().map(|at| format!(" ({}:{})", at.file(), at.line())).unwrap_or_default();
        output::tell(&format!(
            "boundwright: internal error: {what}{place}\n\
             This is a mistake in boundwright, not in your file. Please report it together with the input.\n"
        ));
    }));
    let thread = std::thread::Builder::new().name("work".to_string()).stack_size(STACK).spawn(work);
    match thread {
        Ok(thread) => thread.join().map_err(|_| ()),
        Err(error) => {
            output::tell(&format!("boundwright: internal error: no thread could be started: {error}\n"));
            Err(())
        }
    }
}
