import { Select } from "@base-ui/react/select";

export interface Option {
  readonly value: string;
  readonly label: string;
  readonly about?: string;
}

interface ChoiceProps {
  readonly label: string;
  readonly value: string;
  readonly options: readonly Option[];
  readonly onChoose: (value: string) => void;
}

/** One of a few, each with a line about it. */
export function Choice({ label, value, options, onChoose }: ChoiceProps) {
  return (
    <Select.Root items={[...options]} value={value} onValueChange={(next: string | null) => next !== null && next !== value && onChoose(next)}>
      <Select.Trigger className="choice-trigger" aria-label={label}>
        <Select.Value />
        <Select.Icon className="choice-mark">▾</Select.Icon>
      </Select.Trigger>
      <Select.Portal>
        <Select.Positioner className="positioner" sideOffset={4} align="end" alignItemWithTrigger={false}>
          <Select.Popup className="popup">
            {options.map((option) => (
              <Select.Item key={option.value} value={option.value} className="choice-item">
                <Select.ItemText>{option.label}</Select.ItemText>
                {option.about !== undefined && <span className="choice-about">{option.about}</span>}
              </Select.Item>
            ))}
          </Select.Popup>
        </Select.Positioner>
      </Select.Portal>
    </Select.Root>
  );
}
