/** Who the local demo offers on its sign-in page. Shown only where DEMO_SIGN_INS says so; the seed makes these people. */
export const demoPassword = 'load-line-demo';

export const demoSignIns = [
  { email: 'mix@copperkettle.example', label: 'Mix engineer, Copper Kettle Post' },
  { email: 'qc@harrowsound.example', label: 'QC operator, Harrow Sound Television' },
  { email: 'specs@harrowsound.example', label: 'Spec owner, Harrow Sound Television' },
  { email: 'admin@harrowsound.example', label: 'Administrator, Harrow Sound Television' },
  { email: 'admin@copperkettle.example', label: 'Administrator, Copper Kettle Post' },
  { email: 'mix@tworooks.example', label: 'Mix engineer, Two Rooks Studio' },
  { email: 'mix@fennellane.example', label: 'Mix engineer, Fennel Lane Mixes' },
  { email: 'qc@larkfield.example', label: 'QC operator, Larkfield Audio' },
  { email: 'specs@larkfield.example', label: 'Spec owner, Larkfield Audio' },
] as const;
