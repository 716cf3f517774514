//! How much memory there is, and how much the process uses.

/// Bytes that programs can still use without swapping, where the system tells (Linux: `MemAvailable`).
pub fn available() -> Option<u64> {
    let text = std::fs::read_to_string("/proc/meminfo").ok()?;
    parse_line(&text, "MemAvailable:")
}

/// Bytes of memory that the process holds now, where the system tells (Linux: `VmRSS`).
pub fn resident() -> Option<u64> {
    let text = std::fs::read_to_string("/proc/self/status").ok()?;
    parse_line(&text, "VmRSS:")
}

/// The most bytes of memory that the process ever held, where the system tells (Linux: `VmHWM`).
pub fn peak() -> Option<u64> {
    let text = std::fs::read_to_string("/proc/self/status").ok()?;
    parse_line(&text, "VmHWM:")
}

fn parse_line(text: &str, name: &str) -> Option<u64> {
    let line = text.lines().find_map(|line| line.strip_prefix(name))?;
    let kibibytes: u64 = line.trim().strip_suffix("kB")?.trim().parse().ok()?;
    Some(kibibytes * 1024)
}

/// A number of bytes for people: `3.2 GiB`.
pub fn display(bytes: u64) -> String {
    let units = ["bytes", "KiB", "MiB", "GiB", "TiB"];
    let mut value = bytes as f64;
    let mut unit = 0;
    while value >= 1024.0 && unit + 1 < units.len() {
        value /= 1024.0;
        unit += 1;
    }
    if unit == 0 {
        format!("{bytes} bytes")
    } else {
        format!("{value:.1} {}", units[unit])
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn reads_the_line_that_matters() {
        let text = "MemTotal:       100 kB\nMemAvailable:   2048 kB\n";
        assert_eq!(parse_line(text, "MemAvailable:"), Some(2 * 1024 * 1024));
        assert_eq!(parse_line("MemTotal: 1 kB", "MemAvailable:"), None);
        assert_eq!(display(500), "500 bytes");
        assert_eq!(display(3 << 30), "3.0 GiB");
    }

    #[test]
    #[cfg(target_os = "linux")]
    fn the_peak_rises_with_what_is_held() {
        let before = peak().expect("Linux tells");
        let held = vec![1u8; 64 << 20];
        assert!(resident().expect("Linux tells") >= held.len() as u64);
        assert!(peak().expect("Linux tells") >= before.max(held.len() as u64));
    }
}
