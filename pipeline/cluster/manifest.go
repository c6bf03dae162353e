package cluster

// What job files have of the API of Kubernetes, under its names.

type job struct {
	APIVersion string `json:"apiVersion"`
	Kind       string `json:"kind"`
	Metadata   struct {
		Name string `json:"name"`
	} `json:"metadata"`
	Spec jobSpec `json:"spec"`
}

type jobSpec struct {
	CompletionMode       string            `json:"completionMode,omitempty"`
	Completions          int               `json:"completions,omitempty"`
	Parallelism          int               `json:"parallelism,omitempty"`
	BackoffLimit         int               `json:"backoffLimit,omitempty"`
	BackoffLimitPerIndex int               `json:"backoffLimitPerIndex,omitempty"`
	PodFailurePolicy     *podFailurePolicy `json:"podFailurePolicy,omitempty"`
	Template             struct {
		Spec podSpec `json:"spec"`
	} `json:"template"`
}

type podFailurePolicy struct {
	Rules []podFailureRule `json:"rules"`
}

type podFailureRule struct {
	Action          string         `json:"action"`
	OnExitCodes     *exitCodes     `json:"onExitCodes,omitempty"`
	OnPodConditions []podCondition `json:"onPodConditions,omitempty"`
}

type exitCodes struct {
	Operator string `json:"operator"`
	Values   []int  `json:"values"`
}

type podCondition struct {
	Type   string `json:"type"`
	Status string `json:"status"`
}

type podSpec struct {
	RestartPolicy                 string      `json:"restartPolicy"`
	TerminationGracePeriodSeconds int         `json:"terminationGracePeriodSeconds"`
	Containers                    []container `json:"containers"`
	Volumes                       []volume    `json:"volumes"`
}

type container struct {
	Name      string   `json:"name"`
	Image     string   `json:"image"`
	Command   []string `json:"command"`
	Resources struct {
		Requests map[string]string `json:"requests"`
		Limits   map[string]string `json:"limits"`
	} `json:"resources"`
	VolumeMounts []mount `json:"volumeMounts"`
}

type mount struct {
	Name      string `json:"name"`
	MountPath string `json:"mountPath"`
	ReadOnly  bool   `json:"readOnly,omitempty"`
}

type volume struct {
	Name                  string `json:"name"`
	PersistentVolumeClaim struct {
		ClaimName string `json:"claimName"`
		ReadOnly  bool   `json:"readOnly,omitempty"`
	} `json:"persistentVolumeClaim"`
}
