//! Dyadic numbers m·2^e and intervals between them, rounded outward.

use alloc::string::{String, ToString};
use core::cmp::Ordering;
use core::ops::{Add, Mul, Neg, Sub};
use dashu_int::ops::{BitTest, PowerOfTwo};
use dashu_int::{IBig, UBig};
use dashu_ratio::RBig;

/// The number `mantissa`·2^`exponent`. Not normalised: compare by value, not by field.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Dyadic {
    /// The integer factor.
    pub mantissa: IBig,
    /// The power of two.
    pub exponent: i64,
}

impl Dyadic {
    /// Zero.
    pub const ZERO: Self = Self { mantissa: IBig::ZERO, exponent: 0 };

    /// The number m·2^e.
    pub fn new(mantissa: IBig, exponent: i64) -> Self {
        Self { mantissa, exponent }
    }

    /// The exact value of a finite `f64`; None for infinities and NaN.
    pub fn from_f64(value: f64) -> Option<Self> {
        if !value.is_finite() {
            return None;
        }
        let bits = value.to_bits();
        let raw = ((bits >> 52) & 0x7ff) as i64;
        let fraction = bits & ((1 << 52) - 1);
        let (mantissa, exponent) = if raw == 0 { (fraction, -1074) } else { (fraction | (1 << 52), raw - 1075) };
        let magnitude = IBig::from(mantissa);
        Some(Self::new(if bits >> 63 == 1 { -magnitude } else { magnitude }, exponent))
    }

    /// The nearest `f64` below 2^-1000 away from over- and underflow; rounded towards zero in the last bit at worst.
    pub fn to_f64(&self) -> f64 {
        let (mantissa, exponent) = self.to_f64_parts();
        libm::ldexp(mantissa, exponent.clamp(-4000, 4000) as i32)
    }

    /// Mantissa in ±[0.5, 1] (or 0) and exponent, for numbers beyond the range of `f64`.
    pub fn to_f64_parts(&self) -> (f64, i64) {
        let bits = self.mantissa.bit_len() as i64;
        if bits == 0 {
            return (0.0, 0);
        }
        // Keep 64 bits: the conversion itself then rounds once.
        let shift = (bits - 64).max(0);
        let top = &self.mantissa >> (shift as usize);
        (libm::ldexp(top.to_f64().value(), -(bits.min(64) as i32)), self.exponent + shift + bits.min(64))
    }

    /// −1, 0 or 1.
    pub fn signum(&self) -> i32 {
        sign_of(&self.mantissa)
    }

    /// floor(log2 |x|) + 1, and None for zero.
    pub fn magnitude(&self) -> Option<i64> {
        (self.signum() != 0).then(|| self.mantissa.bit_len() as i64 + self.exponent)
    }

    /// The largest number of `bits` significant bits that is not above this one.
    pub fn round_down(&self, bits: usize) -> Self {
        let excess = self.mantissa.bit_len() as i64 - bits as i64;
        if excess <= 0 {
            return self.clone();
        }
        // A right shift of a dashu integer rounds towards −∞.
        Self::new(&self.mantissa >> (excess as usize), self.exponent + excess)
    }

    /// The smallest number of `bits` significant bits that is not below this one.
    pub fn round_up(&self, bits: usize) -> Self {
        -(-self.clone()).round_down(bits)
    }

    /// Half of the sum.
    pub fn midpoint(&self, other: &Self) -> Self {
        let sum = self + other;
        Self::new(sum.mantissa, sum.exponent - 1)
    }

    /// The same number without trailing zero bits in the mantissa.
    pub fn shortened(&self) -> Self {
        match self.mantissa.trailing_zeros() {
            None => Self::ZERO,
            Some(zeros) => Self::new(&self.mantissa >> zeros, self.exponent + zeros as i64),
        }
    }

    /// As an exact rational.
    pub fn to_rational(&self) -> RBig {
        if self.exponent >= 0 {
            RBig::from(&self.mantissa << (self.exponent as usize))
        } else {
            RBig::from_parts(self.mantissa.clone(), UBig::ONE << (-self.exponent as usize))
        }
    }

    /// self/other rounded down to about `bits` significant bits; `other` must not be zero.
    pub fn divide_down(&self, other: &Self, bits: usize) -> Self {
        let shift = (bits as i64 + other.mantissa.bit_len() as i64 - self.mantissa.bit_len() as i64 + 1).max(0);
        let numerator = &self.mantissa << (shift as usize);
        Self::new(floor_divide(&numerator, &other.mantissa), self.exponent - other.exponent - shift)
    }

    /// self/other rounded up to about `bits` significant bits; `other` must not be zero.
    pub fn divide_up(&self, other: &Self, bits: usize) -> Self {
        -(-self.clone()).divide_down(other, bits)
    }
}

/// The sign of an integer: −1, 0 or 1.
pub fn sign_of(value: &IBig) -> i32 {
    if value.is_zero() {
        0
    } else if value.sign() == dashu_int::Sign::Negative {
        -1
    } else {
        1
    }
}

/// The quotient rounded towards −∞.
fn floor_divide(numerator: &IBig, denominator: &IBig) -> IBig {
    use dashu_int::ops::DivRem;
    let (quotient, remainder) = numerator.div_rem(denominator);
    if !remainder.is_zero() && (sign_of(&remainder) != sign_of(denominator)) { quotient - 1 } else { quotient }
}

fn aligned(a: &Dyadic, b: &Dyadic) -> (IBig, IBig, i64) {
    let exponent = a.exponent.min(b.exponent);
    (&a.mantissa << ((a.exponent - exponent) as usize), &b.mantissa << ((b.exponent - exponent) as usize), exponent)
}

impl Add<&Dyadic> for &Dyadic {
    type Output = Dyadic;
    fn add(self, other: &Dyadic) -> Dyadic {
        let (a, b, exponent) = aligned(self, other);
        Dyadic::new(a + b, exponent)
    }
}

impl Sub<&Dyadic> for &Dyadic {
    type Output = Dyadic;
    fn sub(self, other: &Dyadic) -> Dyadic {
        let (a, b, exponent) = aligned(self, other);
        Dyadic::new(a - b, exponent)
    }
}

impl Mul<&Dyadic> for &Dyadic {
    type Output = Dyadic;
    fn mul(self, other: &Dyadic) -> Dyadic {
        Dyadic::new(&self.mantissa * &other.mantissa, self.exponent + other.exponent)
    }
}

impl Neg for Dyadic {
    type Output = Dyadic;
    fn neg(self) -> Dyadic {
        Dyadic::new(-self.mantissa, self.exponent)
    }
}

impl PartialOrd for Dyadic {
    fn partial_cmp(&self, other: &Self) -> Option<Ordering> {
        Some(self.cmp(other))
    }
}

impl Ord for Dyadic {
    /// Consistent with `==` only for shortened numbers; `m·2^e` and `2m·2^(e−1)` compare as equal here.
    fn cmp(&self, other: &Self) -> Ordering {
        let (sa, sb) = (self.signum(), other.signum());
        if sa != sb {
            return sa.cmp(&sb);
        }
        if sa == 0 {
            return Ordering::Equal;
        }
        let by_magnitude = self.magnitude().cmp(&other.magnitude());
        if by_magnitude != Ordering::Equal {
            return if sa > 0 { by_magnitude } else { by_magnitude.reverse() };
        }
        let (a, b, _) = aligned(self, other);
        a.cmp(&b)
    }
}

/// A closed interval between two dyadic numbers, `low` ≤ `high`.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Interval {
    /// The lower end.
    pub low: Dyadic,
    /// The upper end.
    pub high: Dyadic,
}

impl Interval {
    /// The single number.
    pub fn point(value: Dyadic) -> Self {
        Self { low: value.clone(), high: value }
    }

    /// The tightest interval of `bits` significant bits around a rational; a point where the rational is dyadic and short.
    pub fn around(value: &RBig, bits: usize) -> Self {
        let numerator = Dyadic::new(value.numerator().clone(), 0);
        let denominator = Dyadic::new(value.denominator().clone().into(), 0);
        let short = value.denominator().is_power_of_two();
        if short {
            let exponent = value.denominator().trailing_zeros().unwrap_or(0) as i64;
            return Self::point(Dyadic::new(value.numerator().clone(), -exponent));
        }
        Self { low: numerator.divide_down(&denominator, bits), high: numerator.divide_up(&denominator, bits) }
    }

    /// −1 or 1 where every number of the interval has that sign, 0 for the point zero, None where the sign is open.
    pub fn sign(&self) -> Option<i32> {
        let (low, high) = (self.low.signum(), self.high.signum());
        (low == high).then_some(low)
    }

    /// True where the two intervals share a number.
    pub fn meets(&self, other: &Self) -> bool {
        self.low <= other.high && other.low <= self.high
    }

    /// The smallest interval that holds both.
    pub fn hull(&self, other: &Self) -> Self {
        Self { low: self.low.clone().min(other.low.clone()), high: self.high.clone().max(other.high.clone()) }
    }

    /// The common part; the two must meet.
    pub fn common(&self, other: &Self) -> Self {
        Self { low: self.low.clone().max(other.low.clone()), high: self.high.clone().min(other.high.clone()) }
    }

    /// The middle.
    pub fn midpoint(&self) -> Dyadic {
        self.low.midpoint(&self.high)
    }

    /// True where width ≤ 2^−bits times the smaller of the ends' magnitudes. A point is always narrow.
    pub fn narrow(&self, bits: i64) -> bool {
        let width = &self.high - &self.low;
        let Some(width) = width.magnitude() else { return true };
        match (self.sign(), self.low.magnitude(), self.high.magnitude()) {
            (Some(_), Some(low), Some(high)) => width < low.min(high) - bits,
            _ => false,
        }
    }

    /// Ends rounded outward to `bits` significant bits.
    pub fn rounded(&self, bits: usize) -> Self {
        Self { low: self.low.round_down(bits), high: self.high.round_up(bits) }
    }

    /// The negative interval.
    pub fn negated(&self) -> Self {
        Self { low: -self.high.clone(), high: -self.low.clone() }
    }

    /// Sum.
    pub fn plus(&self, other: &Self) -> Self {
        Self { low: &self.low + &other.low, high: &self.high + &other.high }
    }

    /// Product.
    pub fn times(&self, other: &Self) -> Self {
        let ends = [&self.low * &other.low, &self.low * &other.high, &self.high * &other.low, &self.high * &other.high];
        let low = ends.iter().min().cloned().unwrap_or(Dyadic::ZERO);
        let high = ends.iter().max().cloned().unwrap_or(Dyadic::ZERO);
        Self { low, high }
    }

    /// Quotient to about `bits` significant bits; None where the divisor may be zero.
    pub fn over(&self, divisor: &Self, bits: usize) -> Option<Self> {
        if !matches!(divisor.sign(), Some(1 | -1)) {
            return None;
        }
        let pairs = [
            (&self.low, &divisor.low),
            (&self.low, &divisor.high),
            (&self.high, &divisor.low),
            (&self.high, &divisor.high),
        ];
        let low = pairs.iter().map(|(a, b)| a.divide_down(b, bits)).min()?;
        let high = pairs.iter().map(|(a, b)| a.divide_up(b, bits)).max()?;
        Some(Self { low, high })
    }

    /// Decimal numbers of about `digits` significant digits just outside of the two ends.
    pub fn decimal_bracket(&self, digits: u32) -> [String; 2] {
        [
            decimal_below(&self.low.to_rational(), digits),
            negated_text(&decimal_below(&(-self.high.to_rational()), digits)),
        ]
    }
}

/// Decimal numbers of `digits` significant digits around a rational; the same one twice where it is exact.
pub fn rational_bracket(value: &RBig, digits: u32) -> [String; 2] {
    [decimal_below(value, digits), negated_text(&decimal_below(&(-value.clone()), digits))]
}

/// The largest decimal of `digits` significant digits that is not above `value`, in plain or scientific notation.
pub fn decimal_below(value: &RBig, digits: u32) -> String {
    if value.is_zero() {
        return "0".to_string();
    }
    // Estimate the decimal exponent from the bit lengths; one digit more or less does no harm.
    let bits = value.numerator().bit_len() as f64 - value.denominator().bit_len() as f64;
    let exponent = libm::floor(bits * core::f64::consts::LOG10_2) as i64;
    let shift = i64::from(digits) - 1 - exponent;
    let ten = |power: i64| IBig::from(10).pow(power.unsigned_abs() as usize);
    let scaled = if shift >= 0 {
        floor_divide(&(value.numerator() * ten(shift)), &value.denominator().clone().into())
    } else {
        floor_divide(value.numerator(), &(IBig::from(value.denominator().clone()) * ten(shift)))
    };
    place_point(&scaled, -shift)
}

/// The digits of an integer times 10^exponent, written for people and parsers.
fn place_point(digits: &IBig, exponent: i64) -> String {
    let text = digits.to_string();
    let (sign, magnitude) = text.strip_prefix('-').map_or(("", text.as_str()), |rest| ("-", rest));
    if magnitude == "0" {
        return "0".to_string();
    }
    let trimmed = magnitude.trim_end_matches('0');
    let exponent = exponent + (magnitude.len() - trimmed.len()) as i64;
    // The position of the decimal point, counted from the first digit.
    let point = trimmed.len() as i64 + exponent;
    let mut out = String::from(sign);
    if (-5..=0).contains(&point) {
        out.push_str("0.");
        out.extend(core::iter::repeat_n('0', -point as usize));
        out.push_str(trimmed);
    } else if (1..=21).contains(&point) {
        let whole = point as usize;
        if whole >= trimmed.len() {
            out.push_str(trimmed);
            out.extend(core::iter::repeat_n('0', whole - trimmed.len()));
        } else {
            out.push_str(&trimmed[..whole]);
            out.push('.');
            out.push_str(&trimmed[whole..]);
        }
    } else {
        out.push_str(&trimmed[..1]);
        if trimmed.len() > 1 {
            out.push('.');
            out.push_str(&trimmed[1..]);
        }
        out.push('e');
        out.push_str(&(point - 1).to_string());
    }
    out
}

fn negated_text(text: &str) -> String {
    match text.strip_prefix('-') {
        Some(rest) => rest.to_string(),
        None if text == "0" => text.to_string(),
        None => alloc::format!("-{text}"),
    }
}

/// The rational as "1386", "0.05" (where the decimal ends within 20 digits) or "-2/15".
pub fn exact_text(value: &RBig) -> String {
    let mut rest: IBig = value.denominator().clone().into();
    for prime in [2, 5] {
        while !rest.is_one() && (&rest % prime) == 0_i32 {
            rest /= prime;
        }
    }
    let text = decimal_below(value, 20);
    let exact = rest.is_one() && decimal_below(&(-value.clone()), 20) == negated_text(&text);
    if exact { text } else { value.to_string() }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn decimals_stand_outside_of_the_interval() {
        let third = RBig::from_parts(IBig::from(1), UBig::from(3u8));
        let bracket = Interval::around(&third, 60).decimal_bracket(17);
        assert_eq!(bracket, ["0.33333333333333333".to_string(), "0.33333333333333334".to_string()]);
        let minus = Interval::around(&(-third), 60).decimal_bracket(17);
        assert_eq!(minus, ["-0.33333333333333334".to_string(), "-0.33333333333333333".to_string()]);
    }

    #[test]
    fn exact_numbers_are_written_as_typed() {
        let text = |n: i64, d: u64| exact_text(&RBig::from_parts(IBig::from(n), UBig::from(d)));
        assert_eq!(text(1386, 1), "1386");
        assert_eq!(text(-1, 20), "-0.05");
        assert_eq!(text(-2, 15), "-2/15");
        assert_eq!(text(0, 1), "0");
        assert_eq!(text(1, 1_000_000_000), "1e-9");
    }

    #[test]
    fn floats_survive_the_round_trip() {
        for value in [0.0, 1.0, -0.1, 1e-300, 123_456.789e200, f64::MIN_POSITIVE] {
            let back = Dyadic::from_f64(value).expect("finite").to_f64();
            assert_eq!(back.to_bits(), value.to_bits(), "{value}");
        }
        assert!(Dyadic::from_f64(f64::NAN).is_none());
    }

    #[test]
    fn quotients_are_rounded_outward() {
        let one = Dyadic::new(IBig::from(1), 0);
        let three = Dyadic::new(IBig::from(3), 0);
        let (low, high) = (one.divide_down(&three, 10), one.divide_up(&three, 10));
        assert!(low.to_f64() < 1.0 / 3.0 && 1.0 / 3.0 < high.to_f64());
        assert!(high.to_f64() - low.to_f64() < 2e-3);
        assert!((-one.clone()).divide_down(&three, 10) < (-one).divide_up(&three, 10));
    }
}
