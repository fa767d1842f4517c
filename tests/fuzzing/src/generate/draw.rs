//! Choices taken from bytes; when they run out every choice is the first.

use arbitrary::Unstructured;

/// A source of choices.
pub(super) struct Draw<'a>(Unstructured<'a>);

impl<'a> Draw<'a> {
    pub(super) fn new(bytes: &'a [u8]) -> Self {
        Self(Unstructured::new(bytes))
    }

    /// A number below `count`.
    pub(super) fn below(&mut self, count: usize) -> usize {
        self.0
            .int_in_range(0..=count.saturating_sub(1))
            .unwrap_or(0)
    }

    /// True for one in `count` values.
    pub(super) fn one_in(&mut self, count: usize) -> bool {
        self.below(count) + 1 == count
    }

    /// One of a list that is not empty.
    pub(super) fn pick<T: Copy>(&mut self, list: &[T]) -> T {
        list[self.below(list.len())]
    }

    /// The first entries of a list, `least` of them or more.
    pub(super) fn prefix<T: Copy>(&mut self, list: &[T], least: usize) -> Vec<T> {
        let count = least + self.below(list.len() + 1 - least);
        list[..count].to_vec()
    }

    /// A number as it is written: mostly plain, at times extreme.
    pub(super) fn number(&mut self) -> String {
        const PLAIN: [&str; 12] = [
            "1", "2", "0.5", "0.1", "3", "0", "0.05", "10", "1.5", "4", "1e-3", "100",
        ];
        const EXTREME: [&str; 10] = [
            "1e-300",
            "1e300",
            "123456789.123456789",
            "1e-16",
            "9007199254740993",
            "0.3333333333333333",
            "1e10",
            "4503599627370497.5",
            "1.7976931348623157e308",
            "5e-324",
        ];
        match self.below(16) {
            15 => self.pick(&EXTREME).to_owned(),
            14 => format!("{}", self.0.arbitrary::<u16>().unwrap_or(0)),
            13 => {
                let value: u16 = self.0.arbitrary().unwrap_or(0);
                format!("{}", f64::from(value) / 1000.0)
            }
            _ => self.pick(&PLAIN).to_owned(),
        }
    }
}
