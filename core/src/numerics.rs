//! Square roots and magnitudes without a software detour: on WebAssembly `libm` computes both in software, which took a
//! quarter of the time of a locus; the page is compiled with vector instructions, and these have a square root.

use nalgebra::Complex;

/// √x.
#[cfg(all(target_arch = "wasm32", target_feature = "simd128"))]
pub(crate) fn square_root(x: f64) -> f64 {
    use core::arch::wasm32::{f64x2_extract_lane, f64x2_splat, f64x2_sqrt};
    f64x2_extract_lane::<0>(f64x2_sqrt(f64x2_splat(x)))
}

/// √x.
#[cfg(not(all(target_arch = "wasm32", target_feature = "simd128")))]
pub(crate) fn square_root(x: f64) -> f64 {
    libm::sqrt(x)
}

/// |z|, to a few rounding errors, without over- or underflow of the squares.
pub(crate) fn magnitude(z: Complex<f64>) -> f64 {
    let (a, b) = (z.re.abs(), z.im.abs());
    let (large, small) = if a > b { (a, b) } else { (b, a) };
    if small == 0.0 {
        return large;
    }
    let ratio = small / large;
    large * square_root(1.0 + ratio * ratio)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn magnitudes_do_not_overflow() {
        let of = |re: f64, im: f64| magnitude(Complex::new(re, im));
        assert!((of(3e200, -4e200) / 5e200 - 1.0).abs() < 1e-15);
        assert!((of(3e-200, 4e-200) / 5e-200 - 1.0).abs() < 1e-15);
        assert_eq!(of(0.0, 0.0).to_bits(), 0.0_f64.to_bits());
        assert!(of(f64::INFINITY, 1.0).is_infinite());
    }
}
