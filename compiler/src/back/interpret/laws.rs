//! Laws of states after a step, evaluated value by value.

use std::rc::Rc;

use driftwright_runtime::law::{ChiSquare, Image, Law, Lognormal, Mixture, Normal};

use super::uniform::Uniform;
use crate::program::{LawImage, LawShape, Program, StateLaw, ValueId};

/// The law of a state, given its value before and the step; the same operations as in generated code.
pub(super) fn law(
    program: &Program,
    setup: &Uniform,
    law: &StateLaw,
    before: f64,
    step: [f64; 2],
) -> Box<dyn Law> {
    let mut values = setup.clone();
    let known = program.law_values(law.operands()).into_iter();
    values.run_law(
        program,
        known.filter(|&id| !program.is_asked(id)),
        [before, f64::NAN],
        step,
    );
    match law.shape {
        LawShape::Normal(numbers) => {
            let [mean, deviation] = numbers.map(|id| values.get(id));
            match &law.image {
                Some(LawImage::Logarithm) => Box::new(Lognormal::new(mean, deviation)),
                image => imaged(
                    program,
                    values,
                    Normal::new(mean, deviation),
                    image.as_ref(),
                    step,
                ),
            }
        }
        LawShape::Mixture(numbers) => {
            let [share, first, second, deviation] = numbers.map(|id| values.get(id));
            let plain = Mixture::new(share, first, second, deviation);
            imaged(program, values, plain, law.image.as_ref(), step)
        }
        LawShape::Reflected(numbers) => {
            let [scale, freedom, noncentrality] = numbers.map(|id| values.get(id));
            let plain = ChiSquare::reflected(scale, freedom, noncentrality);
            imaged(program, values, plain, law.image.as_ref(), step)
        }
        LawShape::Absorbed(numbers) => {
            let [scale, freedom, noncentrality] = numbers.map(|id| values.get(id));
            let plain = ChiSquare::absorbed(scale, freedom, noncentrality);
            imaged(program, values, plain, law.image.as_ref(), step)
        }
    }
}

fn imaged(
    program: &Program,
    values: Uniform,
    plain: impl Law + 'static,
    image: Option<&LawImage>,
    step: [f64; 2],
) -> Box<dyn Law> {
    let Some(&LawImage::Map {
        forward,
        slope,
        inverse,
        ref domain,
    }) = image
    else {
        return Box::new(plain);
    };
    let domain = values.interval(domain);
    let (program, values) = (Rc::new(program.clone()), Rc::new(values));
    let function = |id: ValueId| {
        let (program, values) = (Rc::clone(&program), Rc::clone(&values));
        let all = program.law_values([id]).into_iter();
        let asked: Vec<ValueId> = all.filter(|&id| program.is_asked(id)).collect();
        move |at: f64| {
            let mut values = (*values).clone();
            values.run_law(&program, asked.iter().copied(), [f64::NAN, at], step);
            values.get(id)
        }
    };
    let [forward, slope, inverse] = [forward, slope, inverse].map(function);
    Box::new(Image::new(plain, domain, forward, slope, inverse))
}
