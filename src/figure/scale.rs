//! Axis scales: ranges, ticks and the words on them.
//!
//! Linear ticks stand at multiples of 1, 2 or 5 times a power of ten. Logarithmic ticks stand at powers of
//! ten, with 2 and 5 between them when the range is short; below one decade the linear rule is used, placed
//! logarithmically. Numbers from 10³ on are written with powers of ten on logarithmic axes.

/// How an axis maps values to lengths.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum Scale {
    /// Equal steps are equal lengths.
    #[default]
    Linear,
    /// Equal ratios are equal lengths; values that are not positive cannot be shown.
    Log,
}

/// Values beyond this size are treated as missing: differences must not overflow.
const VALUE_LIMIT: f64 = 1e300;
/// A linear range narrower than this share of its values is widened: tick labels would need more digits.
const NARROWEST: f64 = 1e-5;

impl Scale {
    /// The word for this scale in messages.
    pub(crate) fn name(self) -> &'static str {
        match self {
            Scale::Linear => "linear",
            Scale::Log => "logarithmic",
        }
    }

    /// Whether a value has a place on an axis of this scale.
    pub(crate) fn shows(self, value: f64) -> bool {
        value.is_finite()
            && value.abs() < VALUE_LIMIT
            && (self == Scale::Linear || value >= f64::MIN_POSITIVE)
    }
}

/// A scale with its range.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) struct Axis {
    pub scale: Scale,
    pub low: f64,
    pub high: f64,
    /// All data are whole numbers: no ticks between them.
    pub whole: bool,
}

/// A mark on an axis.
#[derive(Debug, Clone, PartialEq)]
pub(crate) struct Tick {
    pub value: f64,
    pub label: String,
}

impl Axis {
    /// The axis that just holds the values that can be shown; a conventional one if there are none.
    pub fn holding(scale: Scale, values: impl Iterator<Item = f64>) -> Self {
        let mut axis = Axis {
            scale,
            low: f64::INFINITY,
            high: f64::NEG_INFINITY,
            whole: true,
        };
        for value in values.filter(|&v| scale.shows(v)) {
            axis.low = axis.low.min(value);
            axis.high = axis.high.max(value);
            axis.whole &= value.fract() == 0.0;
        }
        if axis.low > axis.high {
            let (low, high) = if scale == Scale::Log {
                (1.0, 10.0)
            } else {
                (0.0, 1.0)
            };
            return Axis {
                scale,
                low,
                high,
                whole: false,
            };
        }
        axis.widened()
    }

    /// Makes room around a range that is a single value or nearly one.
    fn widened(mut self) -> Self {
        let size = self.low.abs().max(self.high.abs());
        match self.scale {
            Scale::Linear if self.high - self.low <= NARROWEST * size => {
                let room = if size == 0.0 || self.whole && size < 10.0 {
                    1.0
                } else {
                    size / 4.0
                };
                self.low -= room;
                self.high += room;
            }
            Scale::Log if self.high / self.low < 1.0 + NARROWEST => {
                self.low /= 2.0;
                self.high *= 2.0;
                self.whole = false;
            }
            _ => {}
        }
        self
    }

    /// Position of a value, 0 at the low end and 1 at the high end; `None` if it has no place.
    pub fn position(&self, value: f64) -> Option<f64> {
        if !self.scale.shows(value) {
            return None;
        }
        let (v, low, high) = match self.scale {
            Scale::Linear => (value, self.low, self.high),
            Scale::Log => (value.log10(), self.low.log10(), self.high.log10()),
        };
        Some((v - low) / (high - low))
    }

    /// At most about `most` labelled ticks.
    pub fn ticks(&self, most: usize) -> Vec<Tick> {
        let most = most.max(2);
        match self.scale {
            Scale::Linear => self.linear_ticks(most),
            Scale::Log => {
                let decades = self.high.log10() - self.low.log10();
                if decades < 0.9 {
                    return self.linear_ticks(most.min(4));
                }
                let factors: &[f64] = if decades * 3.0 <= most as f64 {
                    &[1.0, 2.0, 5.0]
                } else {
                    &[1.0]
                };
                let stride = (decades / most as f64).ceil().max(1.0) as i32;
                self.decade_values(factors, stride)
                    .into_iter()
                    .map(|(value, factor, exponent)| Tick {
                        value,
                        label: log_label(factor, exponent),
                    })
                    .collect()
            }
        }
    }

    /// Unlabelled ticks between the powers of ten of a logarithmic axis of up to five decades.
    pub fn minor(&self) -> Vec<f64> {
        if self.scale == Scale::Linear || self.high.log10() - self.low.log10() > 5.0 {
            return Vec::new();
        }
        let factors: Vec<f64> = (2..10).map(f64::from).collect();
        self.decade_values(&factors, 1)
            .into_iter()
            .map(|v| v.0)
            .collect()
    }

    fn decade_values(&self, factors: &[f64], stride: i32) -> Vec<(f64, f64, i32)> {
        let first = self.low.log10().floor() as i32;
        let last = self.high.log10().ceil() as i32;
        let slack = 1e-9;
        (first..=last)
            .filter(|e| e.rem_euclid(stride) == 0)
            .flat_map(|e| factors.iter().map(move |&f| (f * 10f64.powi(e), f, e)))
            .filter(|v| v.0 >= self.low * (1.0 - slack) && v.0 <= self.high * (1.0 + slack))
            .collect()
    }

    /// Asks for more ticks until there are two; a step of a third of the range always gives them.
    fn linear_ticks(&self, most: usize) -> Vec<Tick> {
        let tries = most..most + 6;
        let found = tries
            .map(|n| self.ticks_with_step_for(n))
            .find(|ticks| ticks.len() >= 2);
        found.unwrap_or_else(|| self.ticks_with_step_for(most))
    }

    fn ticks_with_step_for(&self, most: usize) -> Vec<Tick> {
        let rough = (self.high - self.low) / most as f64;
        let power = rough.log10().floor() as i32;
        let base = 10f64.powi(power);
        let factor = [1.0, 2.0, 5.0, 10.0]
            .into_iter()
            .find(|f| f * base >= rough * (1.0 - 1e-9));
        let mut step = factor.unwrap_or(10.0) * base;
        if self.whole && step < 1.0 {
            step = 1.0;
        }
        let first = (self.low / step - 1e-9).ceil();
        let count = ((self.high / step + 1e-9).floor() - first).max(0.0) as usize;
        let size = self.low.abs().max(self.high.abs());
        (0..=count.min(4 * most))
            .map(|i| (first + i as f64) * step)
            .map(|value| Tick {
                value,
                label: linear_label(value, step, size),
            })
            .collect()
    }
}

/// A multiple of `step` on an axis whose values reach `size`.
fn linear_label(value: f64, step: f64, size: f64) -> String {
    let step_power = (step.log10() + 1e-9).floor() as i32;
    if value.abs() < step / 2.0 {
        return "0".to_owned();
    }
    let size_power = size.log10().floor() as i32;
    if (-3..5).contains(&size_power) {
        return minus(format!("{value:.*}", (-step_power).max(0) as usize));
    }
    let digits = (size_power - step_power).clamp(0, 12) as usize;
    let mantissa = format!("{:.*}", digits, value / 10f64.powi(size_power));
    minus(format!("{mantissa}·{}", power_of_ten(size_power)))
}

/// `factor` times 10 to the power `exponent`, `factor` 1, 2 or 5.
fn log_label(factor: f64, exponent: i32) -> String {
    match (factor == 1.0, exponent) {
        (_, 0..=2) => format!("{}", factor * 10f64.powi(exponent)),
        (_, -2..0) => format!("{:.*}", -exponent as usize, factor * 10f64.powi(exponent)),
        (true, _) => power_of_ten(exponent),
        (false, _) => format!("{factor}·{}", power_of_ten(exponent)),
    }
}

/// 10 with a raised exponent.
fn power_of_ten(exponent: i32) -> String {
    let raised = exponent
        .to_string()
        .chars()
        .map(|c| match c {
            '-' => '⁻',
            '1' => '¹',
            '2' => '²',
            '3' => '³',
            digit => char::from_u32(0x2070 + (digit as u32 - '0' as u32)).unwrap_or(digit),
        })
        .collect::<String>();
    format!("10{raised}")
}

/// The true minus sign.
fn minus(text: String) -> String {
    text.replace('-', "−")
}
