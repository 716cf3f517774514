//! How much memory there is.

/// Bytes that programs can still use without swapping, where the system tells (Linux: `MemAvailable`).
pub fn available() -> Option<u64> {
    let text = std::fs::read_to_string("/proc/meminfo").ok()?;
    parse_available(&text)
}

fn parse_available(meminfo: &str) -> Option<u64> {
    let line = meminfo
        .lines()
        .find_map(|line| line.strip_prefix("MemAvailable:"))?;
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
        assert_eq!(parse_available(text), Some(2 * 1024 * 1024));
        assert_eq!(parse_available("MemTotal: 1 kB"), None);
        assert_eq!(display(500), "500 bytes");
        assert_eq!(display(3 << 30), "3.0 GiB");
    }
}
