//! A parameter over drawn length, interpolated without overshoot.

use super::Curve;
use crate::numeric::scalar::ln;

impl Curve {
    /// The same value at every length.
    pub fn constant(value: f64) -> Curve {
        Curve {
            lengths: vec![0.0],
            values: vec![value],
        }
    }

    /// Value at a drawn length in metres, SI units.
    ///
    /// Between the entries of a table the value follows a cubic in ln L that never leaves the
    /// interval of its two neighbours, so a table that falls gives a curve that falls: the monotone
    /// scheme of Fritsch & Carlson, SIAM J. Numer. Anal. 17 (1980) 238-246. Its first derivative
    /// over ln L is continuous. Outside the table the end values hold: a search that reaches past
    /// the last measured length must not live on extrapolation. A length that is no number
    /// gets the first entry.
    pub fn at(&self, length: f64) -> f64 {
        let last = self.values.len() - 1;
        if last == 0 || length.is_nan() || length <= self.lengths[0] {
            return self.values[0];
        }
        if length >= self.lengths[last] {
            return self.values[last];
        }
        // `left` is the entry at or below the length; both neighbours exist by the tests above.
        let left = self.lengths.partition_point(|&entry| entry <= length) - 1;
        let step = ln(self.lengths[left + 1] / self.lengths[left]);
        let rise = self.values[left + 1] - self.values[left];
        let t = ln(length / self.lengths[left]) / step;
        // Hermite cubic on [0, 1]; tangents scaled to the interval.
        let (a, b) = (self.tangent(left) * step, self.tangent(left + 1) * step);
        let value = self.values[left]
            + t * (a + t * ((3.0 * rise - 2.0 * a - b) + t * (a + b - 2.0 * rise)));
        // Rounding alone could step over a neighbour by one part in 1e16.
        let (low, high) = if rise < 0.0 {
            (self.values[left + 1], self.values[left])
        } else {
            (self.values[left], self.values[left + 1])
        };
        value.clamp(low, high)
    }

    /// Secant slope over ln L between entries `i` and `i + 1`.
    fn secant(&self, i: usize) -> f64 {
        (self.values[i + 1] - self.values[i]) / ln(self.lengths[i + 1] / self.lengths[i])
    }

    /// Slope over ln L at entry `i`: the parabola through three entries, limited to three times
    /// either secant, which is the square inside the monotonicity region of Fritsch & Carlson
    /// (their region S1), and zero where the table turns.
    fn tangent(&self, i: usize) -> f64 {
        let last = self.values.len() - 1;
        if i == 0 {
            return self.secant(0);
        }
        if i == last {
            return self.secant(last - 1);
        }
        let (left, right) = (self.secant(i - 1), self.secant(i));
        if left * right <= 0.0 {
            return 0.0;
        }
        let (before, after) = (
            ln(self.lengths[i] / self.lengths[i - 1]),
            ln(self.lengths[i + 1] / self.lengths[i]),
        );
        let parabola = (after * left + before * right) / (before + after);
        parabola.signum() * parabola.abs().min(3.0 * left.abs().min(right.abs()))
    }
}
