// Quantities of a model by name and unit.
#include "tacet/condition.h"

const char *tacet_model_quantity_text(const tacet_model *m, tacet_quantity_ref q,
                                      char out[TACET_QUANTITY_TEXT])
{
    return tacet_quantity_text(q, tacet_model_train(m), &tacet_model_study(m)->body, out);
}

const char *tacet_model_quantity_unit(const tacet_model *m, tacet_quantity_ref q)
{
    return tacet_quantity_unit(q, &tacet_model_study(m)->body);
}

const char *tacet_model_limit_unit(const tacet_model *m, size_t limit)
{
    return tacet_limit_unit(tacet_model_limit(m, limit), &tacet_model_study(m)->body);
}
